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

#[cfg(test)]
mod tests {
    use crate::{Outline, rectangle};
    use geo_types::{LineString, Polygon};

    #[test]
    fn interior_rings_are_open_until_a_region_fills_them() {
        let ring = |a: f64, b: f64| LineString::from(vec![(a, a), (b, a), (b, b), (a, b)]);
        let frame = Polygon::new(ring(0.0, 3.0), vec![ring(1.0, 2.0)]);
        let mut outline = Outline::new();
        outline.region("frame", &frame).unwrap();
        assert!((outline.mesh(0.5).unwrap().measure() - 8.0).abs() < 1e-12);
        outline.region("core", rectangle((1.0, 1.0), (2.0, 2.0))).unwrap();
        let filled = outline.mesh(0.5).unwrap();
        assert!((filled.measure() - 9.0).abs() < 1e-12);
        assert_eq!(filled.region_names().len(), 2);
    }
}
