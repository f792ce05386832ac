//! The conduction term ∫ A∇u·∇v.

use hypercircle_mesh::Mesh;

use super::MatrixKernel;
use crate::space::clip;
use crate::{AssemblyError, Block, CellView, Coefficient, Tensor, check};

/// ∫ A∇u·∇v with a conductivity A, checked to be positive definite wherever it is asked for.
///
/// Cells in which A is constant take a closed form: three (in two dimensions) reference matrices weighted with
/// det J · J⁻¹AJ⁻ᵀ; others go point by point.
#[derive(Clone, Copy)]
pub struct Diffusion<'a, const D: usize> {
    mesh: &'a Mesh<D>,
    conductivity: &'a dyn Coefficient<D, Value = Tensor<D>>,
}

impl<const D: usize> std::fmt::Debug for Diffusion<'_, D> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str("Diffusion")
    }
}

impl<'a, const D: usize> Diffusion<'a, D> {
    /// The term with a conductivity; the mesh tells names in errors.
    #[must_use]
    pub fn new(mesh: &'a Mesh<D>, conductivity: &'a dyn Coefficient<D, Value = Tensor<D>>) -> Self {
        Self { mesh, conductivity }
    }
}

/// w J⁻¹ A J⁻ᵀ: the metric that turns reference gradients into the integrand.
#[inline]
fn metric<const D: usize>(inverse: &[[f64; D]; D], a: &Tensor<D>, w: f64) -> [[f64; D]; D] {
    let mut metric = [[0.0; D]; D];
    for i in 0..D {
        let row = a.apply(&inverse[i]);
        for j in 0..D {
            for k in 0..D {
                metric[j][i] += w * inverse[j][k] * row[k];
            }
        }
    }
    metric
}

impl<const D: usize> MatrixKernel<D> for Diffusion<'_, D> {
    fn cell(&self, cell: &CellView<'_, '_, D>, matrix: &mut [f64]) -> Result<(), AssemblyError> {
        let n = cell.function_count();
        let mut gradients = vec![[0.0; D]; n];
        for q in 0..cell.point_count() {
            let place = cell.place(q);
            let a = self.conductivity.at(place);
            check::conductivity(self.mesh, place, &a)?;
            for (i, gradient) in gradients.iter_mut().enumerate() {
                *gradient = cell.gradient(q, i);
            }
            for i in 0..n {
                let flow = a.apply(&gradients[i]);
                for j in 0..n {
                    let product: f64 = (0..D).map(|k| flow[k] * gradients[j][k]).sum();
                    matrix[i * n + j] += cell.weight(q) * product;
                }
            }
        }
        Ok(())
    }

    fn block(&self, block: &Block<'_, D>, matrices: &mut [f64]) -> Result<(), AssemblyError> {
        let table = block.table();
        let n = table.function_count();
        let mut reference = Vec::new(); // ∫ ∂ₐφᵢ ∂_b φⱼ on the reference cell, laid out [i][j][a][b]
        let mut values = Vec::new();
        for (c, matrix) in matrices.chunks_exact_mut(n * n).enumerate() {
            let place = &block.places()[c];
            if let Some(a) = self.conductivity.constant_in(place.region) {
                check::conductivity(self.mesh, place, &a)?;
                if reference.is_empty() {
                    reference = reference_products::<D>(block);
                }
                let g = metric(block.inverse_jacobian(c), &a, block.determinant(c));
                for (entry, products) in matrix.iter_mut().zip(&reference) {
                    for i in 0..D {
                        for j in 0..D {
                            *entry += g[i][j] * products[i][j];
                        }
                    }
                }
                continue;
            }
            if values.is_empty() {
                values = vec![Tensor::from(0.0); block.places().len()];
                self.conductivity.fill(block.places(), &mut values);
            }
            for q in 0..table.point_count() {
                let at = q * block.len() + c;
                check::conductivity(self.mesh, &block.places()[at], &values[at])?;
                let g = metric(block.inverse_jacobian(c), &values[at], block.weights()[at]);
                let gradients = table.gradients_at(q);
                for i in 0..n {
                    let flow: [f64; D] = std::array::from_fn(|a| (0..D).map(|b| g[a][b] * gradients[i][b]).sum());
                    for j in 0..n {
                        matrix[i * n + j] += (0..D).map(|a| flow[a] * gradients[j][a]).sum::<f64>();
                    }
                }
            }
        }
        Ok(())
    }
}

fn reference_products<const D: usize>(block: &Block<'_, D>) -> Vec<[[f64; D]; D]> {
    let table = block.table();
    let n = table.function_count();
    let mut products = vec![[[0.0; D]; D]; n * n];
    for (q, w) in block.reference_weights().iter().enumerate() {
        let gradients: Vec<[f64; D]> = table.gradients_at(q).iter().map(clip).collect();
        for i in 0..n {
            for j in 0..n {
                for a in 0..D {
                    for b in 0..D {
                        products[i * n + j][a][b] += w * gradients[i][a] * gradients[j][b];
                    }
                }
            }
        }
    }
    products
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Place, Space, cell_rule, tensorial};
    use hypercircle_mesh::Rectangle;

    #[test]
    fn closed_form_and_point_by_point_agree() {
        let mesh = Rectangle::new([0.0, 0.0], [1.3, 0.7], [2, 3]).mesh().unwrap();
        let space = Space::new(mesh.into(), 2).unwrap();
        let a = Tensor::symmetric([[3.0, 1.0], [1.0, 2.0]]);
        let (closed, general) = (tensorial::<2, _>(a), tensorial::<2, _>(move |_: &Place<2>| a));
        let rule = cell_rule(&space).unwrap();
        let table = space.basis().table(rule.points());
        let cells: Vec<_> = space.mesh().cells().collect();
        let block = Block::of_cells(&space, &cells, &rule, &table);
        let n = table.function_count();
        let mut results = Vec::new();
        for coefficient in [&closed, &general] {
            let kernel = Diffusion::new(space.mesh(), coefficient.as_ref());
            let mut matrices = vec![0.0; cells.len() * n * n];
            kernel.block(&block, &mut matrices).unwrap();
            let mut single = vec![0.0; n * n];
            kernel.cell(&block.cell(1), &mut single).unwrap();
            for (x, y) in single.iter().zip(&matrices[n * n..]) {
                assert!((x - y).abs() < 1e-13);
            }
            results.push(matrices);
        }
        for (x, y) in results[0].iter().zip(&results[1]) {
            assert!((x - y).abs() < 1e-13);
        }
    }
}
