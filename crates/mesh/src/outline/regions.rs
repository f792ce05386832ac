//! Who lies where: faces of the arrangement get their region, edges the regions on either hand and their name.

use super::Stated;
use super::arrange::{Arrangement, Edge};
use super::loops::{LoopFault, fault};
use super::sides::{Choice, Sides};
use super::triangulation::{NONE, Triangulation, next};
use crate::{MeshError, Names, VertexId};

/// What is to be meshed: points and the borders between them.
#[derive(Debug)]
pub(super) struct Plan {
    pub(super) points: Vec<[f64; 2]>,
    pub(super) borders: Vec<Border>,
    pub(super) region_names: Names,
    pub(super) side_names: Names,
}

/// An edge with a region on at least one hand that is a border of regions or has a name.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Border {
    pub(super) ends: [u32; 2],
    /// Region on the left of the way from the first to the second end, or [`NONE`].
    pub(super) left: u32,
    /// Region on the right, or [`NONE`].
    pub(super) right: u32,
    /// Number of the side name, or [`NONE`].
    pub(super) name: u32,
}

/// Finds the regions and names of an arrangement.
pub(super) fn plan(
    stated: &[Stated],
    sides: &[(String, Sides)],
    Arrangement { points, edges, tolerance }: Arrangement,
) -> Result<Plan, MeshError> {
    let mut region_names = Names::default();
    let number: Vec<u32> = stated.iter().map(|s| if s.hole { NONE } else { region_names.add(&s.name) }).collect();
    let ends: Vec<[u32; 2]> = edges.iter().map(|e| e.ends).collect();
    let mut faces = Triangulation::constrained(points, &ends)?;
    color_faces(&mut faces, &edges, stated, &number)?;
    check_hidden(&faces, stated, &number)?;

    let mut borders = Vec::with_capacity(edges.len());
    for Edge { ends, .. } in &edges {
        let hand = |from, to| faces.edge(from, to).map_or(NONE, |h| faces.region[h as usize / 3]);
        borders.push(Border { ends: *ends, left: hand(ends[0], ends[1]), right: hand(ends[1], ends[0]), name: NONE });
    }
    let side_names = name_borders(&mut borders, &edges, &faces, stated, sides, &region_names, tolerance)?;
    borders.retain(|b| b.left != b.right || (b.name != NONE && b.left != NONE));
    check_pinched(&borders, &faces)?;
    let points = compact(&mut borders, &faces.points);
    Ok(Plan { points, borders, region_names, side_names })
}

/// Gives each triangle the region of its face. Faces are reached from the outside; crossing an edge enters or leaves
/// the areas the edge belongs to, so membership never depends on rounding.
fn color_faces(faces: &mut Triangulation, edges: &[Edge], stated: &[Stated], number: &[u32]) -> Result<(), MeshError> {
    let mut seen = vec![false; faces.triangle_count()];
    let outside = vec![false; stated.len()];
    let mut ways: Vec<(u32, Vec<bool>)> = Vec::new(); // a half-edge by which to enter a face, and who lies there
    for h in (0..faces.mate.len() as u32).filter(|h| faces.mate[*h as usize] == NONE) {
        ways.push((h, across(&outside, faces.segment[h as usize], edges)));
    }
    let mut inside_face = Vec::new();
    while let Some((way, members)) = ways.pop() {
        if std::mem::replace(&mut seen[way as usize / 3], true) {
            continue;
        }
        let region = region_of(&members, stated, number).map_err(|hole| {
            let corners = faces.corners(way / 3);
            let middle = [0, 1].map(|i| (corners[0][i] + corners[1][i] + corners[2][i]) / 3.0);
            fault(&stated[hole].name, LoopFault::Outside, middle)
        })?;
        inside_face.push(way / 3);
        while let Some(t) = inside_face.pop() {
            faces.region[t as usize] = region;
            for h in 3 * t..3 * t + 3 {
                let (mate, segment) = (faces.mate[h as usize], faces.segment[h as usize]);
                if mate == NONE || seen[mate as usize / 3] {
                    continue;
                }
                if segment == NONE {
                    seen[mate as usize / 3] = true;
                    inside_face.push(mate / 3);
                } else {
                    ways.push((mate, across(&members, segment, edges)));
                }
            }
        }
    }
    Ok(())
}

/// Who lies on the other hand of an edge.
fn across(members: &[bool], segment: u32, edges: &[Edge]) -> Vec<bool> {
    let mut members = members.to_vec();
    if segment != NONE {
        for area in &edges[segment as usize].areas {
            members[*area as usize] ^= true;
        }
    }
    members
}

/// The region of the last area stated, nothing in holes; the number of a hole that has no region around it.
fn region_of(members: &[bool], stated: &[Stated], number: &[u32]) -> Result<u32, usize> {
    let last = |hole: bool| (0..members.len()).rev().find(|i| members[*i] && stated[*i].hole == hole);
    match (last(true), last(false)) {
        (Some(hole), None) => Err(hole),
        (None, Some(area)) => Ok(number[area]),
        _ => Ok(NONE),
    }
}

/// Every region name must have been left some face.
fn check_hidden(faces: &Triangulation, stated: &[Stated], number: &[u32]) -> Result<(), MeshError> {
    let mut used = vec![false; stated.len()];
    for region in faces.region.iter().filter(|r| **r != NONE) {
        used[*region as usize] = true;
    }
    match stated.iter().zip(number).find(|(_, n)| **n != NONE && !used[**n as usize]) {
        Some((s, _)) => Err(fault(&s.name, LoopFault::Hidden, s.area.outer.corners()[0])),
        None => Ok(()),
    }
}

/// Names of holes first, then the statements in order, the later over the earlier.
fn name_borders(
    borders: &mut [Border],
    edges: &[Edge],
    faces: &Triangulation,
    stated: &[Stated],
    sides: &[(String, Sides)],
    region_names: &Names,
    tolerance: f64,
) -> Result<Names, MeshError> {
    const HOLE: u32 = 1 << 31; // names of holes get their final number last: a hole may lose all sides to statements
    for (border, edge) in borders.iter_mut().zip(edges) {
        let hole = edge.areas.iter().find(|a| stated[**a as usize].hole);
        if let (Some(hole), true) = (hole, border.left != border.right) {
            border.name = HOLE + hole;
        }
    }
    let mut names = Names::default();
    for (name, choice) in sides {
        let wanted = match &choice.0 {
            Choice::BorderOf(region) => region_names.require("region", region)?,
            Choice::Between(..) | Choice::RestOfBoundary => NONE,
        };
        let number = names.add(name);
        let mut found = false;
        for border in borders.iter_mut() {
            let boundary = (border.left == NONE) != (border.right == NONE);
            let chosen = match &choice.0 {
                Choice::Between(..) => {
                    (border.left != NONE || border.right != NONE)
                        && choice.0.on_line(border.ends.map(|p| faces.place(p)), 2.0 * tolerance)
                }
                Choice::BorderOf(_) => border.left != border.right && (border.left == wanted || border.right == wanted),
                Choice::RestOfBoundary => boundary && border.name == NONE,
            };
            if chosen {
                border.name = number;
                found = true;
            }
        }
        if !found {
            return Err(MeshError::NoSuchSide { name: name.clone(), place: choice.words() });
        }
    }
    for border in borders.iter_mut().filter(|b| b.name != NONE && b.name >= HOLE) {
        border.name = names.add(&stated[(border.name - HOLE) as usize].name);
    }
    Ok(names)
}

/// At each point of the boundary exactly two boundary edges meet.
fn check_pinched(borders: &[Border], faces: &Triangulation) -> Result<(), MeshError> {
    let mut meeting = vec![0_u8; faces.points.len()];
    for border in borders.iter().filter(|b| b.left == NONE || b.right == NONE) {
        for end in border.ends {
            meeting[end as usize] = meeting[end as usize].saturating_add(1);
        }
    }
    match meeting.iter().position(|count| *count > 2) {
        Some(v) => Err(MeshError::PinchedVertex { vertex: VertexId(v as u32), at: faces.points[v].to_vec() }),
        None => Ok(()),
    }
}

/// Keeps the points that borders use.
fn compact(borders: &mut [Border], points: &[[f64; 2]]) -> Vec<[f64; 2]> {
    let mut number = vec![NONE; points.len()];
    let mut kept = Vec::new();
    for end in borders.iter_mut().flat_map(|b| &mut b.ends) {
        let new = &mut number[*end as usize];
        if *new == NONE {
            *new = kept.len() as u32;
            kept.push(points[*end as usize]);
        }
        *end = *new;
    }
    kept
}

/// Floods the regions over a triangulation of the plan, from the hands of its borders.
pub(super) fn flood(triangles: &mut Triangulation, borders: &[Border]) {
    let mut stack = Vec::new();
    for h in 0..triangles.mate.len() as u32 {
        let segment = triangles.segment[h as usize];
        if segment == NONE {
            continue;
        }
        let Border { ends, left, right, .. } = borders[segment as usize];
        let region = if triangles.from(h) == ends[0] { left } else { right };
        if region != NONE && triangles.region[h as usize / 3] == NONE {
            triangles.region[h as usize / 3] = region;
            stack.push(h / 3);
        }
    }
    while let Some(t) = stack.pop() {
        for h in 3 * t..3 * t + 3 {
            let mate = triangles.mate[h as usize];
            if triangles.segment[h as usize] == NONE && mate != NONE && triangles.region[mate as usize / 3] == NONE {
                debug_assert_eq!(triangles.from(mate), triangles.from(next(h)));
                triangles.region[mate as usize / 3] = triangles.region[t as usize];
                stack.push(mate / 3);
            }
        }
    }
}
