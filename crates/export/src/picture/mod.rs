//! Pictures of fields as SVG.

mod arrows;
mod axes;
mod bar;
mod borders;
mod colors;
mod contour;
mod curve;
mod frame;
mod layout;
mod lines;
mod markers;
mod names;
mod parabola;
mod pieces;
mod raster;
mod rooms;
mod scan;
mod shade;
mod svg;

use std::path::Path;

use hypercircle_mesh::Mesh;

use self::colors::Scale;
use self::layout::{Layout, Wishes};
use self::markers::Mark;
use self::names::Notes;
use self::svg::Svg;
use crate::vtu::check_cells;
use crate::{ExportError, Field};

pub use self::colors::Colors;
pub use self::curve::CurvePicture;
pub(crate) use self::svg::escape;

/// A picture of a triangle mesh and what lies on it: a shaded field, contour lines, arrows, marked points.
///
/// Both axes have one scale. Small meshes are drawn as polygons, big ones as an image inside the file, so that files
/// stay small. Lines of a mesh of more than 40 000 sides are left out.
///
/// ```
/// use hypercircle_export::{Field, Picture};
/// use hypercircle_mesh::Rectangle;
/// let plate = Rectangle::new([0.0, 0.0], [2.0, 1.0], [16, 8]).mesh()?;
/// let field = Field::of_function(&plate, "temperature", "°C", 2, |x| 20.0 + x[0] * x[1]);
/// let flux = vec![[-1.0, -0.5]; plate.cell_count()];
/// let svg = Picture::of(&plate)
///     .title("Plate with a warm corner")
///     .length_unit("m")
///     .field(&field)
///     .contours(8)
///     .arrows(&flux, "W/m²")
///     .marker([2.0, 1.0], "hottest 22.0 °C")
///     .to_svg()?;
/// assert!(svg.starts_with("<?xml") && svg.contains("hottest 22.0 °C"));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Debug, Clone)]
#[must_use]
pub struct Picture<'a> {
    mesh: &'a Mesh<2>,
    title: String,
    length_unit: String,
    field: Option<&'a Field>,
    colors: Colors,
    contours: usize,
    mesh_lines: bool,
    arrows: Option<(&'a [[f64; 2]], String)>,
    markers: Vec<([f64; 2], String)>,
    region_names: bool,
    side_names: bool,
}

impl<'a> Picture<'a> {
    /// A picture of the mesh: its borders and, unless there is a field, its cells.
    pub fn of(mesh: &'a Mesh<2>) -> Self {
        Self {
            mesh,
            title: String::new(),
            length_unit: String::new(),
            field: None,
            colors: Colors::default(),
            contours: 0,
            mesh_lines: false,
            arrows: None,
            markers: Vec::new(),
            region_names: false,
            side_names: false,
        }
    }

    /// The title above the picture.
    pub fn title(mut self, title: &str) -> Self {
        self.title = title.into();
        self
    }

    /// The unit of the coordinates, for the titles of the axes.
    pub fn length_unit(mut self, unit: &str) -> Self {
        self.length_unit = unit.into();
        self
    }

    /// Shades the mesh by a field and explains the colors in a bar.
    pub fn field(mut self, field: &'a Field) -> Self {
        self.field = Some(field);
        self
    }

    /// Chooses the colors of the field.
    pub fn colors(mut self, colors: Colors) -> Self {
        self.colors = colors;
        self
    }

    /// Draws about so many contour lines at round values of the field.
    pub fn contours(mut self, count: usize) -> Self {
        self.contours = count;
        self
    }

    /// Whether to draw the sides of cells.
    pub fn mesh_lines(mut self, wanted: bool) -> Self {
        self.mesh_lines = wanted;
        self
    }

    /// Draws one vector for each cell (a flux, say) as arrows on a regular grid, with a legend in this unit.
    pub fn arrows(mut self, vectors: &'a [[f64; 2]], unit: &str) -> Self {
        self.arrows = Some((vectors, unit.into()));
        self
    }

    /// Marks a point with a text, beside it or, where there is no room, below the picture.
    pub fn marker(mut self, place: [f64; 2], text: &str) -> Self {
        self.markers.push((place, text.into()));
        self
    }

    /// Whether to write the names of regions into them.
    pub fn region_names(mut self, wanted: bool) -> Self {
        self.region_names = wanted;
        self
    }

    /// Whether to write the names of sides along them.
    pub fn side_names(mut self, wanted: bool) -> Self {
        self.side_names = wanted;
        self
    }

    /// The text of the SVG file.
    ///
    /// # Errors
    /// For arrays that do not fit the mesh, values that are not finite, and a mesh that cannot be drawn to scale.
    pub fn to_svg(&self) -> Result<String, ExportError> {
        self.check()?;
        let (low, high) = self.mesh.bounding_box();
        let wishes = Wishes { title: &self.title, bar: self.field.is_some(), arrow_legend: self.arrows.is_some() };
        let layout = Layout::new(low, high, wishes)?;
        let mut svg = Svg::default();
        let to_pixel = |x| layout.to_pixel(x);
        if let Some(field) = self.field {
            self.draw_field(&mut svg, &layout, field)?;
        }
        if self.mesh_lines || self.field.is_none() {
            borders::mesh_lines(&mut svg, self.mesh, &to_pixel);
        }
        borders::borders(&mut svg, self.mesh, &to_pixel);
        if let Some((vectors, unit)) = &self.arrows {
            arrows::draw(&mut svg, &layout, self.mesh, vectors, unit);
        }
        layout.draw(&mut svg, &self.length_unit);
        let marks = self.marks(&layout)?;
        let names = self.draw_names(&mut svg, &layout);
        let mut notes = markers::draw(&mut svg, layout.frame, &marks, &names.points());
        notes.extend(names.lines);
        let height = svg.notes(&notes, layout.frame[0].min(24.0), layout.below, layout.width());
        Ok(svg.finish(layout.width(), height))
    }

    /// Writes names; gives those without room, to be listed.
    fn draw_names(&self, svg: &mut Svg, layout: &Layout) -> Notes {
        let mut notes = Notes::default();
        if self.side_names {
            names::sides(svg, layout, self.mesh, &mut notes);
        }
        if self.region_names {
            names::regions(svg, layout, self.mesh, &mut notes);
        }
        notes
    }

    fn check(&self) -> Result<(), ExportError> {
        if let Some((vectors, _)) = &self.arrows {
            check_cells(self.mesh, "arrows", vectors.len(), |c| vectors[c].iter().all(|v| v.is_finite()))?;
        }
        Ok(())
    }

    /// Markers on the page; one outside of the frame would not be seen.
    fn marks(&self, layout: &Layout) -> Result<Vec<Mark<'_>>, ExportError> {
        let [left, top, right, bottom] = layout.frame;
        let mut marks = Vec::new();
        for (place, text) in &self.markers {
            let at = layout.to_pixel(*place);
            if !((left..=right).contains(&at[0]) && (top..=bottom).contains(&at[1])) {
                return Err(ExportError::Marker { text: text.clone(), place: place.to_vec() });
            }
            marks.push(Mark { at, text });
        }
        Ok(marks)
    }

    fn draw_field(&self, svg: &mut Svg, layout: &Layout, field: &Field) -> Result<(), ExportError> {
        let (low, high) = field.range().unwrap_or((0.0, 0.0));
        if !(2.0 * low.abs().max(high.abs())).is_finite() {
            return Err(ExportError::Extent { what: field.name().into(), low: vec![low], high: vec![high] });
        }
        let scale = Scale::new(low, high, self.colors);
        let pieces = pieces::pieces(self.mesh, field, &field.check(self.mesh)?, |x| layout.to_pixel(x));
        if !shade::bands(svg, pieces.iter().copied(), &scale) {
            let (corner, size) = layout.domain();
            raster::draw(svg, &pieces, &scale, corner, size)?;
        }
        let levels = contour::levels(low, high, self.contours);
        contour::draw(svg, &pieces, &scale, &levels);
        bar::draw(svg, layout, field, &scale, &levels);
        Ok(())
    }

    /// Writes the SVG file.
    ///
    /// # Errors
    /// Those of [`Self::to_svg`], and [`ExportError::Io`] when the file cannot be written.
    pub fn save(&self, path: impl AsRef<Path>) -> Result<(), ExportError> {
        ExportError::write(path.as_ref(), self.to_svg()?.as_bytes())
    }
}
