//! Reference cells, polynomial bases and quadrature rules.
//!
//! This crate knows neither meshes nor matrices. It answers three questions about a reference cell ([`Shape`]): which
//! functions live on it, what are their values and gradients at a point, and with which points and weights does one
//! integrate.
//!
//! ```
//! use hypercircle_element::{Lagrange, Rule, Shape};
//! // Stiffness of the quadratic functions on the reference triangle, ∫ ∇φ₀·∇φ₀ = 1 (textbook).
//! let rule = Rule::of_degree(Shape::Triangle, 2)?;
//! let table = Lagrange::new(Shape::Triangle, 2)?.table(rule.points());
//! let entry: f64 = (0..rule.len())
//!     .map(|q| {
//!         let g = table.gradients_at(q)[0];
//!         rule.weights()[q] * (g[0] * g[0] + g[1] * g[1])
//!     })
//!     .sum();
//! assert!((entry - 1.0).abs() < 1e-14);
//! # Ok::<(), hypercircle_element::ElementError>(())
//! ```
//!
//! Rooms: [`Shape`] (reference cells); [`Rule`] (points and weights), [`Quadrature`] (the trait behind rules of your own,
//! with the catalogs [`IntervalRule`] and [`TriangleRule`]) and [`Adaptive`] (rough integrands); [`Lagrange`] (nodal bases
//! of any order), [`Hierarchic`] (bases that grow with the order), [`CrouzeixRaviart`] (midpoints of sides),
//! [`RaviartThomas`] (fields with continuous normal component); [`Table`] (bases tabulated at points) and the orthonormal
//! polynomials beneath them ([`orthonormal_values`], [`unit_legendre`]).
#![forbid(unsafe_code)]

mod crouzeix_raviart;
mod dense;
mod error;
mod hierarchic;
mod lagrange;
mod orthonormal;
mod quadrature;
mod raviart_thomas;
mod shape;
mod table;

pub use crouzeix_raviart::CrouzeixRaviart;
pub use error::ElementError;
pub use hierarchic::Hierarchic;
pub use lagrange::Lagrange;
pub use orthonormal::{orthonormal_values, polynomial_count, unit_legendre};
pub use quadrature::{
    Adaptive, Composite, Integral, IntegralEnd, IntervalRule, Kronrod, Quadrature, Rule, TriangleRule,
};
pub use raviart_thomas::RaviartThomas;
pub use shape::Shape;
pub use table::Table;
