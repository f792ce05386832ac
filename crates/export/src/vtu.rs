//! Field files in the open XML format for unstructured grids (`.vtu`), which general-purpose viewers read.

use std::fmt::Write as _;
use std::path::Path;

use base64::Engine as _;
use base64::engine::general_purpose::STANDARD;
use hypercircle_mesh::Mesh;

use crate::nodes::place;
use crate::picture::escape;
use crate::{ExportError, Field};

/// A field file of a mesh: fields at nodes, numbers and vectors of cells.
///
/// Every cell has nodes of its own, so that a field that jumps between cells is kept as it is. The highest order among
/// the fields is the order of the cells: straight, quadratic, or Lagrange cells of any higher order. The number of each
/// cell's region is always written, as `region`. Arrays are little-endian binary in base64 with lengths of 64 bits.
///
/// ```
/// use hypercircle_export::{Field, VtuFile};
/// use hypercircle_mesh::Rectangle;
/// let mesh = Rectangle::new([0.0, 0.0], [1.0, 1.0], [2, 2]).mesh()?;
/// let field = Field::of_function(&mesh, "temperature", "K", 2, |x| x[0] * x[1]);
/// let flux = vec![[1.0, 0.0]; mesh.cell_count()];
/// let text = VtuFile::of(&mesh).field(&field).cell_vectors("flux", &flux).to_xml()?;
/// assert!(text.contains("UnstructuredGrid"));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
///
/// # Source
/// The published description of the VTK XML file formats, serial unstructured grid.
#[derive(Debug, Clone)]
#[must_use]
pub struct VtuFile<'a, const D: usize> {
    mesh: &'a Mesh<D>,
    fields: Vec<&'a Field>,
    scalars: Vec<(String, &'a [f64])>,
    vectors: Vec<(String, &'a [[f64; D]])>,
}

impl<'a, const D: usize> VtuFile<'a, D> {
    /// A file of the mesh and its regions.
    pub fn of(mesh: &'a Mesh<D>) -> Self {
        Self { mesh, fields: Vec::new(), scalars: Vec::new(), vectors: Vec::new() }
    }

    /// Adds a field at the nodes. Its unit, if any, becomes part of the name: `temperature, K`.
    pub fn field(mut self, field: &'a Field) -> Self {
        self.fields.push(field);
        self
    }

    /// Adds one number for each cell.
    pub fn cell_values(mut self, name: &str, values: &'a [f64]) -> Self {
        self.scalars.push((name.into(), values));
        self
    }

    /// Adds one vector for each cell, written with three components.
    pub fn cell_vectors(mut self, name: &str, vectors: &'a [[f64; D]]) -> Self {
        self.vectors.push((name.into(), vectors));
        self
    }

    /// The text of the file.
    ///
    /// # Errors
    /// [`ExportError::WrongLength`], [`ExportError::NotFinite`] or [`ExportError::Order`] for an array that does
    /// not fit the mesh.
    pub fn to_xml(&self) -> Result<String, ExportError> {
        self.check()?;
        let order = self.fields.iter().map(|f| f.order()).max().unwrap_or(1);
        let points = cell_points(D, order);
        let cells = self.mesh.cell_count();
        let mut xml = format!(
            "<?xml version=\"1.0\"?>\n<VTKFile type=\"UnstructuredGrid\" version=\"1.0\" byte_order=\"LittleEndian\" \
             header_type=\"UInt64\">\n<UnstructuredGrid>\n<Piece NumberOfPoints=\"{}\" NumberOfCells=\"{cells}\">\n",
            points.len() * cells
        );
        self.point_data(&mut xml, &points)?;
        self.cell_data(&mut xml);
        self.geometry(&mut xml, order, &points);
        xml.push_str("</Piece>\n</UnstructuredGrid>\n</VTKFile>\n");
        Ok(xml)
    }

    /// Writes the file.
    ///
    /// # Errors
    /// Those of [`Self::to_xml`], and [`ExportError::Io`] when the file cannot be written.
    pub fn save(&self, path: impl AsRef<Path>) -> Result<(), ExportError> {
        ExportError::write(path.as_ref(), self.to_xml()?.as_bytes())
    }

    fn check(&self) -> Result<(), ExportError> {
        for (name, values) in &self.scalars {
            check_cells(self.mesh, name, values.len(), |c| values[c].is_finite())?;
        }
        for (name, vectors) in &self.vectors {
            check_cells(self.mesh, name, vectors.len(), |c| vectors[c].iter().all(|v| v.is_finite()))?;
        }
        Ok(())
    }

    fn point_data(&self, xml: &mut String, points: &[[f64; 2]]) -> Result<(), ExportError> {
        xml.push_str("<PointData>\n");
        for field in &self.fields {
            let nodes = field.check(self.mesh)?;
            let sampler = nodes.sampler(points);
            let cells = field.values().chunks_exact(nodes.reference().len());
            array(xml, "Float64", &field.label(), 1, cells.flat_map(|c| sampler.values(c)).map(f64::to_le_bytes));
        }
        xml.push_str("</PointData>\n");
        Ok(())
    }

    fn cell_data(&self, xml: &mut String) {
        xml.push_str("<CellData>\n");
        array(xml, "Int32", "region", 1, self.mesh.regions().iter().map(|r| (r.0 as i32).to_le_bytes()));
        for (name, values) in &self.scalars {
            array(xml, "Float64", name, 1, values.iter().map(|v| v.to_le_bytes()));
        }
        for (name, vectors) in &self.vectors {
            array(xml, "Float64", name, 3, vectors.iter().flat_map(padded).map(f64::to_le_bytes));
        }
        xml.push_str("</CellData>\n");
    }

    fn geometry(&self, xml: &mut String, order: usize, points: &[[f64; 2]]) {
        let (each, cells) = (points.len(), self.mesh.cell_count());
        let places = self.mesh.cells().flat_map(|c| points.iter().map(move |p| place(self.mesh, c, p)));
        xml.push_str("<Points>\n");
        array(xml, "Float64", "Points", 3, places.flat_map(|p| padded(&p)).map(f64::to_le_bytes));
        xml.push_str("</Points>\n<Cells>\n");
        // Numbers of the format: line 3, triangle 5; with middles 21 and 22; of any order 68 and 69.
        let kind: u8 = match (D, order) {
            (1, 1) => 3,
            (1, 2) => 21,
            (1, _) => 68,
            (_, 1) => 5,
            (_, 2) => 22,
            _ => 69,
        };
        array(xml, "Int64", "connectivity", 1, (0..(each * cells) as i64).map(i64::to_le_bytes));
        array(xml, "Int64", "offsets", 1, (1..=cells as i64).map(|c| (c * each as i64).to_le_bytes()));
        array(xml, "UInt8", "types", 1, (0..cells).map(|_| [kind]));
        xml.push_str("</Cells>\n");
    }
}

/// Checks an array of one value for each cell.
pub(crate) fn check_cells<const D: usize>(
    mesh: &Mesh<D>,
    name: &str,
    given: usize,
    finite: impl Fn(usize) -> bool,
) -> Result<(), ExportError> {
    if given != mesh.cell_count() {
        return Err(ExportError::WrongLength { what: name.into(), given, expected: mesh.cell_count() });
    }
    match mesh.cells().find(|c| !finite(c.index())) {
        Some(cell) => Err(ExportError::NotFinite {
            name: name.into(),
            cell: cell.index(),
            place: mesh.cell_center(cell).to_vec(),
        }),
        None => Ok(()),
    }
}

/// Reference coordinates of the equidistant points of a cell in the order of the format: vertices, then the inner points
/// of each side, then those inside.
fn cell_points(dimension: usize, order: usize) -> Vec<[f64; 2]> {
    let share = |n: usize| n as f64 / order as f64;
    if dimension == 1 {
        return [0, order].into_iter().chain(1..order).map(|i| [share(i), 0.0]).collect();
    }
    // The points inside form a triangle that is smaller by three steps, ordered likewise.
    let (mut steps, mut size) = (Vec::new(), order);
    for inset in 0..=order / 3 {
        let corners = [[inset, inset], [inset + size, inset], [inset, inset + size]];
        if size == 0 {
            steps.push(corners[0]);
            break;
        }
        steps.extend(corners);
        steps.extend((1..size).map(|k| [inset + k, inset]));
        steps.extend((1..size).map(|k| [inset + size - k, inset + k]));
        steps.extend((1..size).map(|k| [inset, inset + size - k]));
        if size < 3 {
            break;
        }
        size -= 3;
    }
    steps.into_iter().map(|[i, j]| [share(i), share(j)]).collect()
}

/// Three components of a vector of one or two.
fn padded<const D: usize>(v: &[f64; D]) -> [f64; 3] {
    std::array::from_fn(|i| v.get(i).copied().unwrap_or(0.0))
}

/// Appends a binary array: its length in bytes as 64 bits, then the values, all in base64.
fn array<const N: usize>(
    xml: &mut String,
    kind: &str,
    name: &str,
    components: usize,
    values: impl Iterator<Item = [u8; N]>,
) {
    let mut bytes = vec![0; 8];
    bytes.extend(values.flatten());
    let length = (bytes.len() - 8) as u64;
    bytes[..8].copy_from_slice(&length.to_le_bytes());
    let name = escape(name);
    // Writing to a string cannot fail.
    let _ = write!(
        xml,
        "<DataArray type=\"{kind}\" Name=\"{name}\" NumberOfComponents=\"{components}\" format=\"binary\">"
    );
    STANDARD.encode_string(&bytes, xml);
    xml.push_str("</DataArray>\n");
}

#[cfg(test)]
mod tests {
    use hypercircle_mesh::{Interval, Rectangle};
    use quick_xml::events::Event;

    use super::*;

    /// Name, components and bytes of every array, read back with an XML parser.
    fn arrays(xml: &str) -> Vec<(String, usize, Vec<u8>)> {
        let mut reader = quick_xml::Reader::from_str(xml);
        let (mut found, mut head) = (Vec::new(), None);
        loop {
            match reader.read_event().unwrap() {
                Event::Start(e) if e.name().as_ref() == "DataArray" => {
                    let get = |key: &str| {
                        let a = e.try_get_attribute(key).unwrap().unwrap();
                        quick_xml::escape::unescape(&a.value).unwrap().into_owned()
                    };
                    head = Some((get("Name"), get("NumberOfComponents").parse().unwrap()));
                }
                Event::Text(t) if head.is_some() => {
                    let bytes = STANDARD.decode(t.as_ref()).unwrap();
                    let length = u64::from_le_bytes(bytes[..8].try_into().unwrap());
                    assert_eq!(length as usize, bytes.len() - 8);
                    let (name, components) = head.take().unwrap();
                    found.push((name, components, bytes[8..].to_vec()));
                }
                Event::Eof => return found,
                _ => {}
            }
        }
    }

    fn floats(bytes: &[u8]) -> Vec<f64> {
        bytes.chunks_exact(8).map(|b| f64::from_le_bytes(b.try_into().unwrap())).collect()
    }

    #[test]
    fn what_is_written_is_read_back() {
        let mesh = Rectangle::new([0.0, 0.0], [3.0, 1.0], [3, 1]).mesh().unwrap();
        let quadratic = Field::of_function(&mesh, "a < b", "K", 2, |x| x[0] * x[0] + x[1]);
        let linear = Field::of_function(&mesh, "x", "", 1, |x| x[0]);
        let flux: Vec<[f64; 2]> = mesh.cells().map(|c| mesh.cell_center(c)).collect();
        let error: Vec<f64> = (0..mesh.cell_count()).map(|c| c as f64).collect();
        let file = VtuFile::of(&mesh).field(&quadratic).field(&linear).cell_vectors("flux", &flux);
        let read = arrays(&file.cell_values("error", &error).to_xml().unwrap());
        let get = |name: &str| read.iter().find(|a| a.0 == name).unwrap();
        assert_eq!(floats(&get("a < b, K").2), quadratic.values());
        let points = floats(&get("Points").2);
        let x: Vec<f64> = points.chunks_exact(3).map(|p| p[0]).collect();
        let raised = floats(&get("x").2);
        assert!(raised.iter().zip(&x).all(|(a, b)| (a - b).abs() < 1e-15), "a linear field has values in the middles");
        for (p, value) in points.chunks_exact(3).zip(quadratic.values()) {
            assert_eq!(p[0] * p[0] + p[1] + p[2], *value);
        }
        let read_flux = floats(&get("flux").2);
        assert!(read_flux.chunks_exact(3).zip(&flux).all(|(a, b)| a == [b[0], b[1], 0.0]));
        assert_eq!(floats(&get("error").2), error);
        assert_eq!(get("types").2, vec![22; 6]);
        assert_eq!(get("region").2.len(), 4 * 6);
        assert_eq!(get("flux").1, 3);
    }

    #[test]
    fn cells_have_the_type_of_dimension_and_order() {
        let line = Interval::uniform(0.0, 1.0, 2).mesh().unwrap();
        let square = Rectangle::new([0.0, 0.0], [1.0, 1.0], [1, 1]).mesh().unwrap();
        let kind = |xml: String| arrays(&xml).into_iter().find(|a| a.0 == "types").unwrap().2;
        assert_eq!(kind(VtuFile::of(&line).to_xml().unwrap()), [3, 3]);
        assert_eq!(kind(VtuFile::of(&square).to_xml().unwrap()), [5, 5]);
        for (order, wanted) in [(2, [21, 22]), (5, [68, 69])] {
            let bent = Field::of_function(&line, "u", "", order, |x| x[0]);
            assert_eq!(kind(VtuFile::of(&line).field(&bent).to_xml().unwrap()), [wanted[0]; 2]);
            let bent = Field::of_function(&square, "u", "", order, |x| x[0]);
            assert_eq!(kind(VtuFile::of(&square).field(&bent).to_xml().unwrap()), [wanted[1]; 2]);
        }
    }

    #[test]
    fn fields_of_high_order_are_written_at_equidistant_points() {
        let mesh = Rectangle::new([0.0, 0.0], [2.0, 1.0], [2, 1]).mesh().unwrap();
        let f = |x: &[f64; 2]| (x[0] - 0.7 * x[1]).powi(5);
        let field = Field::of_function(&mesh, "u", "", 5, f);
        let read = arrays(&VtuFile::of(&mesh).field(&field).to_xml().unwrap());
        let get = |name: &str| floats(&read.iter().find(|a| a.0 == name).unwrap().2);
        let (points, values) = (get("Points"), get("u"));
        assert_eq!(values.len(), 4 * 21);
        for (p, u) in points.chunks_exact(3).zip(values) {
            assert!((f(&[p[0], p[1]]) - u).abs() < 1e-12);
            assert!((p[0] * 5.0 - (p[0] * 5.0).round()).abs() < 1e-12, "five steps along each side");
        }
    }

    #[test]
    fn points_of_a_triangle_go_around_it_and_inwards() {
        let steps = |order: usize| -> Vec<[usize; 2]> {
            cell_points(2, order).iter().map(|p| p.map(|c| (c * order as f64).round() as usize)).collect()
        };
        assert_eq!(steps(2), [[0, 0], [2, 0], [0, 2], [1, 0], [1, 1], [0, 1]]);
        assert_eq!(steps(3)[3..], [[1, 0], [2, 0], [2, 1], [1, 2], [0, 2], [0, 1], [1, 1]]);
        assert_eq!(steps(4)[12..], [[1, 1], [2, 1], [1, 2]]);
        assert!((1..=12).all(|n| steps(n).len() == (n + 1) * (n + 2) / 2));
        let line: Vec<f64> = cell_points(1, 4).iter().map(|p| p[0]).collect();
        assert_eq!(line, [0.0, 1.0, 0.25, 0.5, 0.75]);
    }

    #[test]
    fn arrays_that_do_not_fit_are_told() {
        let line = Interval::uniform(0.0, 1.0, 2).mesh().unwrap();
        let error = VtuFile::of(&line).cell_values("e", &[1.0]).to_xml().unwrap_err();
        assert_eq!(error, ExportError::WrongLength { what: "e".into(), given: 1, expected: 2 });
        let error = VtuFile::of(&line).cell_vectors("q", &[[1.0], [f64::INFINITY]]).to_xml().unwrap_err();
        assert_eq!(error, ExportError::NotFinite { name: "q".into(), cell: 1, place: vec![0.75] });
    }
}
