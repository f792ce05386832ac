//! Gauss–Kronrod pairs on the interval [0, 1]: a Gauss rule and its extension that uses all of its points.
//!
//! How the numbers were made: the additional nodes are the zeros of the polynomial E of degree n + 1 with
//! ∫ Pₙ E Pₖ = 0 for k ≤ n (T. J. Stieltjes; A. S. Kronrod 1965; D. P. Laurie, Math. Comp. 66, 1997), expanded in
//! Legendre polynomials, found by bisection between the zeros of Pₙ and Newton's method; the weights solve the moment
//! equations; all with 60 digits, then rounded.

use super::gauss;

/// A Gauss–Kronrod pair.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Kronrod {
    /// 7 and 15 points, degrees 13 and 23.
    Points15,
    /// 10 and 21 points, degrees 19 and 31.
    Points21,
    /// 15 and 31 points, degrees 29 and 47.
    Points31,
}

impl Kronrod {
    /// Number of points of the Gauss rule inside.
    #[must_use]
    pub const fn gauss_points(self) -> usize {
        match self {
            Self::Points15 => 7,
            Self::Points21 => 10,
            Self::Points31 => 15,
        }
    }

    /// Degree of the extended rule: 3n + 1 for n Gauss points, one more for odd n by symmetry.
    #[must_use]
    pub const fn degree(self) -> usize {
        let n = self.gauss_points();
        3 * n + 1 + n % 2
    }

    /// Nodes that are not negative and their weights, on [−1, 1].
    const fn table(self) -> &'static [[f64; 2]] {
        match self {
            Self::Points15 => &POINTS_15,
            Self::Points21 => &POINTS_21,
            Self::Points31 => &POINTS_31,
        }
    }

    /// Points and weights of the extended rule; points ascending.
    pub(super) fn extended(self) -> (Vec<[f64; 2]>, Vec<f64>) {
        let half = self.table();
        let left = half.iter().skip(1).rev().map(|[z, w]| ([0.5 * (1.0 - z), 0.0], 0.5 * w));
        let right = half.iter().map(|[z, w]| ([0.5 * (1.0 + z), 0.0], 0.5 * w));
        left.chain(right).unzip()
    }

    /// Weights of the Gauss rule at the points of the extended one: zero at the points that are not its own.
    pub(super) fn gauss_weights(self) -> Vec<f64> {
        let mut weights = vec![0.0; 2 * self.gauss_points() + 1];
        for (k, w) in gauss::interval(self.gauss_points()).1.into_iter().enumerate() {
            weights[2 * k + 1] = w;
        }
        weights
    }
}

const POINTS_15: [[f64; 2]; 8] = [
    [0.0, 0.209_482_141_084_727_82],
    [0.207_784_955_007_898_48, 0.204_432_940_075_298_89],
    [0.405_845_151_377_397_2, 0.190_350_578_064_785_42],
    [0.586_087_235_467_691_1, 0.169_004_726_639_267_9],
    [0.741_531_185_599_394_5, 0.140_653_259_715_525_92],
    [0.864_864_423_359_769_1, 0.104_790_010_322_250_19],
    [0.949_107_912_342_758_5, 0.063_092_092_629_978_56],
    [0.991_455_371_120_812_6, 0.022_935_322_010_529_224],
];
const POINTS_21: [[f64; 2]; 11] = [
    [0.0, 0.149_445_554_002_916_9],
    [0.148_874_338_981_631_22, 0.147_739_104_901_338_49],
    [0.294_392_862_701_460_2, 0.142_775_938_577_060_09],
    [0.433_395_394_129_247_2, 0.134_709_217_311_473_34],
    [0.562_757_134_668_604_7, 0.123_491_976_262_065_84],
    [0.679_409_568_299_024_4, 0.109_387_158_802_297_64],
    [0.780_817_726_586_416_9, 0.093_125_454_583_697_6],
    [0.865_063_366_688_984_5, 0.075_039_674_810_919_96],
    [0.930_157_491_355_708_2, 0.054_755_896_574_351_995],
    [0.973_906_528_517_171_7, 0.032_558_162_307_964_725],
    [0.995_657_163_025_808_1, 0.011_694_638_867_371_874],
];
const POINTS_31: [[f64; 2]; 16] = [
    [0.0, 0.101_330_007_014_791_54],
    [0.101_142_066_918_717_5, 0.100_769_845_523_875_59],
    [0.201_194_093_997_434_51, 0.099_173_598_721_791_96],
    [0.299_180_007_153_168_84, 0.096_642_726_983_623_68],
    [0.394_151_347_077_563_4, 0.093_126_598_170_825_32],
    [0.485_081_863_640_239_7, 0.088_564_443_056_211_76],
    [0.570_972_172_608_538_8, 0.083_080_502_823_133_02],
    [0.650_996_741_297_417, 0.076_849_680_757_720_38],
    [0.724_417_731_360_170_1, 0.069_854_121_318_728_26],
    [0.790_418_501_442_466, 0.062_009_567_800_670_64],
    [0.848_206_583_410_427_2, 0.053_481_524_690_928_09],
    [0.897_264_532_344_081_9, 0.044_589_751_324_764_88],
    [0.937_273_392_400_706, 0.035_346_360_791_375_85],
    [0.967_739_075_679_139_1, 0.025_460_847_326_715_32],
    [0.987_992_518_020_485_4, 0.015_007_947_329_316_122],
    [0.998_002_298_693_397_1, 0.005_377_479_872_923_349],
];

#[cfg(test)]
mod tests {
    use super::*;

    /// Every second point of the extended rule is a Gauss point.
    #[test]
    fn gauss_points_are_among_the_extended_ones() {
        for pair in [Kronrod::Points15, Kronrod::Points21, Kronrod::Points31] {
            let points = pair.extended().0;
            for (k, x) in gauss::interval(pair.gauss_points()).0.iter().enumerate() {
                assert!((points[2 * k + 1][0] - x[0]).abs() < 2e-16);
            }
        }
    }

    /// Nodes that are not negative and weights on [−1, 1], digits as published (A. S. Kronrod, Nodes and Weights of Quadrature
    /// Formulas, 1965; D. P. Laurie, Math. Comp. 66, 1997).
    #[test]
    fn numbers_agree_with_the_published_tables() {
        agree(
            Kronrod::Points15,
            &[
                (0.0, 0.209_482_141_084_727_82),
                (0.207_784_955_007_898_48, 0.204_432_940_075_298_89),
                (0.405_845_151_377_397_2, 0.190_350_578_064_785_42),
                (0.586_087_235_467_691_1, 0.169_004_726_639_267_9),
                (0.741_531_185_599_394_5, 0.140_653_259_715_525_92),
                (0.864_864_423_359_769_1, 0.104_790_010_322_250_19),
                (0.949_107_912_342_758_5, 0.063_092_092_629_978_56),
                (0.991_455_371_120_812_6, 0.022_935_322_010_529_224),
            ],
        );
        agree(
            Kronrod::Points21,
            &[
                (0.0, 0.149_445_554_002_916_9),
                (0.148_874_338_981_631_22, 0.147_739_104_901_338_49),
                (0.294_392_862_701_460_2, 0.142_775_938_577_060_09),
                (0.433_395_394_129_247_2, 0.134_709_217_311_473_34),
                (0.562_757_134_668_604_7, 0.123_491_976_262_065_84),
                (0.679_409_568_299_024_4, 0.109_387_158_802_297_64),
                (0.780_817_726_586_416_9, 0.093_125_454_583_697_6),
                (0.865_063_366_688_984_5, 0.075_039_674_810_919_96),
                (0.930_157_491_355_708_2, 0.054_755_896_574_351_995),
                (0.973_906_528_517_171_7, 0.032_558_162_307_964_725),
                (0.995_657_163_025_808_1, 0.011_694_638_867_371_874),
            ],
        );
    }

    fn agree(pair: Kronrod, published: &[(f64, f64)]) {
        let (points, weights) = pair.extended();
        let n = pair.gauss_points();
        assert_eq!(weights.len(), 2 * published.len() - 1);
        for (k, (z, w)) in published.iter().enumerate() {
            for (i, sign) in [(n + k, 1.0), (n - k, -1.0)] {
                assert!((2.0 * points[i][0] - 1.0 - sign * z).abs() < 3e-16, "{pair:?} node {z}");
                assert!((2.0 * weights[i] - w).abs() < 1e-16, "{pair:?} weight {w}");
            }
        }
    }
}
