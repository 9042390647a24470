//! Integrals of smooth functions by Gauss's rule.

/// Nodes and weights of the rule with ten points on -1 to 1, which is exact for polynomials up to degree 19 (Abramowitz
/// and Stegun, Table 25.4). Each stands for itself and its mirror image.
const TEN_POINTS: [(f64, f64); 5] = [
    (0.148_874_338_981_631_2, 0.295_524_224_714_752_87),
    (0.433_395_394_129_247_2, 0.269_266_719_309_996_35),
    (0.679_409_568_299_024_4, 0.219_086_362_515_982_04),
    (0.865_063_366_688_984_5, 0.149_451_349_150_580_6),
    (0.973_906_528_517_171_7, 0.066_671_344_308_688_14),
];

/// Integral of `f` over consecutive intervals between `edges`, which rise. Put an edge where `f` has a corner, and no
/// interval wider than what `f` changes over.
pub(super) fn integral(edges: &[f64], f: impl Fn(f64) -> f64) -> f64 {
    let mut sum = 0.0;
    for pair in edges.windows(2) {
        let (middle, half) = (0.5 * (pair[0] + pair[1]), 0.5 * (pair[1] - pair[0]));
        for (node, weight) in TEN_POINTS {
            sum += half * weight * (f(middle - half * node) + f(middle + half * node));
        }
    }
    sum
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ten_points_are_exact_up_to_the_nineteenth_power() {
        for power in 0..20 {
            let found = integral(&[0.0, 0.5, 2.0], |x| x.powi(power));
            let wanted = 2.0_f64.powi(power + 1) / f64::from(power + 1);
            assert!((found / wanted - 1.0).abs() < 1e-14, "{power}: {found} against {wanted}");
        }
    }
}
