//! Areas from polygons of the geo ecosystem.

use super::loops::{Area, Polygon, polygon};

/// The exterior ring becomes the loop; interior rings become openings of the area, which are holes unless another
/// region fills them.
impl From<&geo_types::Polygon<f64>> for Area {
    fn from(source: &geo_types::Polygon<f64>) -> Self {
        Self { outer: ring(source.exterior()), openings: source.interiors().iter().map(ring).collect() }
    }
}

impl From<geo_types::Polygon<f64>> for Area {
    fn from(source: geo_types::Polygon<f64>) -> Self {
        Self::from(&source)
    }
}

fn ring(ring: &geo_types::LineString<f64>) -> Polygon {
    polygon(&ring.0.iter().map(|c| (c.x, c.y)).collect::<Vec<_>>())
}
