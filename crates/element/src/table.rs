//! Basis functions tabulated at points.

/// Values and reference gradients of a basis at a list of reference points, point after point.
#[derive(Debug, Clone)]
pub struct Table {
    functions: usize,
    values: Vec<f64>,
    gradients: Vec<[f64; 2]>,
}

impl Table {
    pub(crate) fn new(functions: usize, values: Vec<f64>, gradients: Vec<[f64; 2]>) -> Self {
        Self { functions, values, gradients }
    }

    /// Number of basis functions.
    #[must_use]
    pub fn function_count(&self) -> usize {
        self.functions
    }

    /// Number of points.
    #[must_use]
    pub fn point_count(&self) -> usize {
        self.values.len() / self.functions
    }

    /// Values of all functions at a point.
    #[must_use]
    #[inline]
    pub fn values_at(&self, point: usize) -> &[f64] {
        &self.values[point * self.functions..(point + 1) * self.functions]
    }

    /// Gradients of all functions at a point, with respect to reference coordinates.
    #[must_use]
    #[inline]
    pub fn gradients_at(&self, point: usize) -> &[[f64; 2]] {
        &self.gradients[point * self.functions..(point + 1) * self.functions]
    }
}
