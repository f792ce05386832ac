//! Outlines that do not make sense, each with its error and place.

use super::*;

fn square() -> Outline {
    let mut outline = Outline::new();
    outline.region("plate", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
    outline
}

#[test]
fn nothing_to_mesh() {
    assert!(matches!(Outline::new().mesh(1.0), Err(MeshError::Empty { needed: "region", .. })));
    let mut only_a_hole = Outline::new();
    only_a_hole.hole("duct", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
    assert!(matches!(only_a_hole.mesh(1.0), Err(MeshError::Empty { needed: "region", .. })));
}

#[test]
fn faulty_loops_are_refused_where_they_are_stated() {
    let mut outline = square();
    let error = outline.region("bow", polygon(&[(0.0, 0.0), (1.0, 1.0), (1.0, 0.0), (0.0, 1.0)])).unwrap_err();
    assert_eq!(error, MeshError::Loop { name: "bow".into(), fault: LoopFault::CrossesItself, at: vec![0.5, 0.5] });
    assert!(error.to_string().ends_with(LoopFault::CrossesItself.mend()), "{error}");
    assert!(outline.hole("line", polygon(&[(0.0, 0.0), (1.0, 1.0)])).is_err());
    assert_eq!(outline.mesh(0.5).unwrap().region_names().len(), 1);
}

#[test]
fn crossing_loops_name_both_and_the_place() {
    let mut outline = square();
    outline.region("beam", rectangle((0.5, 0.25), (1.5, 0.75))).unwrap();
    let Err(MeshError::CrossingLoops { first, second, at }) = outline.mesh(0.1) else { panic!() };
    assert_eq!((first.as_str(), second.as_str()), ("plate", "beam"));
    assert!(at == [1.0, 0.25] || at == [1.0, 0.75], "{at:?}");
    let mut holes = square();
    holes.hole("one", rectangle((0.2, 0.2), (0.6, 0.6))).unwrap();
    holes.hole("two", rectangle((0.4, 0.4), (0.8, 0.8))).unwrap();
    assert!(matches!(holes.mesh(0.1), Err(MeshError::CrossingLoops { second, .. }) if second == "two"));
}

#[test]
fn a_hole_beside_the_regions() {
    let mut outline = square();
    outline.hole("duct", rectangle((2.0, 2.0), (3.0, 3.0))).unwrap();
    let Err(MeshError::Loop { name, fault, at }) = outline.mesh(0.1) else { panic!() };
    assert_eq!((name.as_str(), fault), ("duct", LoopFault::Outside));
    assert!(at.iter().all(|x| (2.0..3.0).contains(x)), "{at:?}");
    // Around the regions instead of within them: where there is no region it lies outside.
    let mut around = square();
    around.hole("frame", rectangle((-1.0, -1.0), (2.0, 2.0))).unwrap();
    assert!(matches!(around.mesh(0.1), Err(MeshError::Loop { fault: LoopFault::Outside, .. })));
}

#[test]
fn a_region_of_which_nothing_is_left() {
    let mut outline = Outline::new();
    outline.region("core", rectangle((0.2, 0.2), (0.4, 0.4))).unwrap();
    outline.region("plate", rectangle((0.0, 0.0), (1.0, 1.0))).unwrap();
    let error = outline.mesh(0.1).unwrap_err();
    assert_eq!(error, MeshError::Loop { name: "core".into(), fault: LoopFault::Hidden, at: vec![0.2, 0.2] });
}

#[test]
fn parts_that_touch_in_a_point() {
    let mut outline = square();
    outline.region("other", rectangle((1.0, 1.0), (2.0, 2.0))).unwrap();
    assert!(matches!(outline.mesh(0.1), Err(MeshError::PinchedVertex { at, .. }) if at == [1.0, 1.0]));
    let mut hole = square();
    hole.hole("duct", polygon(&[(0.5, 0.0), (0.7, 0.5), (0.3, 0.5)])).unwrap();
    assert!(matches!(hole.mesh(0.1), Err(MeshError::PinchedVertex { at, .. }) if at == [0.5, 0.0]));
}

#[test]
fn names_that_name_nothing() {
    let mut outline = square();
    outline.side("room", between((0.5, 0.0), (0.5, 1.0))).unwrap();
    let Err(MeshError::NoSuchSide { name, place }) = outline.mesh(0.1) else { panic!() };
    assert_eq!(name, "room");
    assert!(place.contains("(0.5, 0)"), "{place}");
    // A border that lies in a hole is no side of any cell.
    let mut buried = square();
    buried.region("core", rectangle((0.4, 0.4), (0.6, 0.6))).unwrap();
    buried.region("core", rectangle((0.0, 0.0), (0.1, 0.1))).unwrap();
    buried.hole("duct", rectangle((0.3, 0.3), (0.7, 0.7))).unwrap();
    buried.side("lost", between((0.4, 0.4), (0.6, 0.4))).unwrap();
    assert!(matches!(buried.mesh(0.1), Err(MeshError::NoSuchSide { name, .. }) if name == "lost"));
    let mut border = square();
    border.side("skin", border_of("plat")).unwrap();
    let unknown = MeshError::UnknownName { what: "region", name: "plat".into(), known: vec!["plate".into()] };
    assert_eq!(border.mesh(0.1).unwrap_err(), unknown);
    let mut rest = square();
    rest.side("all", border_of("plate")).unwrap().side("rest", rest_of_boundary()).unwrap();
    assert!(matches!(rest.mesh(0.1), Err(MeshError::NoSuchSide { name, .. }) if name == "rest"));
    assert!(matches!(square().side("x", between((0.0, f64::NAN), (1.0, 0.0))), Err(MeshError::NotFinite { .. })));
}

#[test]
fn sizes_at_unknown_names_and_sizes_that_are_none() {
    let mut outline = square();
    outline.side("skin", rest_of_boundary()).unwrap();
    let mut region = outline.clone();
    region.size_in("foam", 0.1).unwrap();
    let unknown = MeshError::UnknownName { what: "region", name: "foam".into(), known: vec!["plate".into()] };
    assert_eq!(region.mesh(0.1).unwrap_err(), unknown);
    let mut side = outline.clone();
    side.size_near_side("room", 0.1).unwrap();
    let unknown = MeshError::UnknownName { what: "side", name: "room".into(), known: vec!["skin".into()] };
    assert_eq!(side.mesh(0.1).unwrap_err(), unknown);
    for bad in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        assert!(matches!(outline.mesh(bad), Err(MeshError::NotPositive { .. })));
        assert!(matches!(outline.size_in("plate", bad), Err(MeshError::NotPositive { .. })));
        assert!(matches!(outline.size_near_point((0.0, 0.0), bad), Err(MeshError::NotPositive { .. })));
        assert!(matches!(outline.size_near_side("skin", bad), Err(MeshError::NotPositive { .. })));
    }
    assert!(matches!(outline.size_near_point((f64::NAN, 0.0), 1.0), Err(MeshError::NotFinite { .. })));
    assert!(matches!(outline.mesh(1e-300), Err(MeshError::NotPositive { .. })), "finer than can be resolved");
    outline.size_near_point((0.3, 0.3), 1e-300).unwrap();
    assert!(matches!(outline.mesh(0.1), Err(MeshError::NotPositive { .. })));
}

#[test]
fn more_cells_than_allowed() {
    let mut outline = square();
    outline.max_cells(1000);
    assert!(outline.mesh(0.1).is_ok());
    let Err(MeshError::TooMany { what: "cells", count, limit: 1000 }) = outline.mesh(0.01) else { panic!() };
    assert!((20_000..26_000).contains(&count), "{count}");
    outline.size_near_point((0.5, 0.5), 0.01).unwrap();
    assert!(outline.mesh(0.1).is_ok(), "a fine spot costs little");
    outline.side("skin", rest_of_boundary()).unwrap().size_near_side("skin", 1e-4).unwrap();
    assert!(matches!(outline.mesh(0.1), Err(MeshError::TooMany { limit: 1000, .. })));
    assert!(matches!(square().mesh(1e-6), Err(MeshError::TooMany { .. })), "refused by the usual limit, at once");
    // Layers force more cells than sizes do: found while refining.
    let mut layers = square();
    layers.region("film", rectangle((0.0, 1.0), (1.0, 1.0001))).unwrap().max_cells(1000);
    assert!(matches!(layers.mesh(0.5), Err(MeshError::TooMany { limit: 1000, .. })));
}
