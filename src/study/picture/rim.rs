//! Where boundary sites stand on the rim of the disk.

use std::f64::consts::TAU;

/// Angles for sites in cyclic order, counter-clockwise, as near as possible (least squares)
/// to `natural` and at least `gap` apart. Isotonic regression by pooling, from the widest
/// natural gap on. Cost: linear in the sites.
pub(super) fn spread(natural: &[f64], gap: f64) -> Vec<f64> {
    let n = natural.len();
    if n < 2 {
        return natural.to_vec();
    }
    let gap = gap.min(TAU / n as f64);
    let ahead = |i: usize| (natural[(i + 1) % n] - natural[i]).rem_euclid(TAU);
    // Steps that go backwards by a hair are no gaps of a whole turn.
    let step = |i: usize| if ahead(i) > TAU * 0.75 && n > 2 { ahead(i) - TAU } else { ahead(i) };
    let mut widest = 0;
    for i in 1..n {
        if step(i) > step(widest) {
            widest = i;
        }
    }
    let first = (widest + 1) % n;
    let mut wanted = Vec::with_capacity(n);
    let mut at = natural[first];
    for k in 0..n {
        wanted.push(at - k as f64 * gap);
        at += step((first + k) % n);
    }
    // Pools of (sum, count), their means ascending.
    let mut pools: Vec<(f64, usize)> = Vec::new();
    for w in wanted {
        pools.push((w, 1));
        while let [.., (s1, c1), (s2, c2)] = pools[..] {
            if s1 / c1 as f64 <= s2 / c2 as f64 {
                break;
            }
            pools.pop();
            *pools.last_mut().expect("two pools") = (s1 + s2, c1 + c2);
        }
    }
    let mut out = Vec::with_capacity(n);
    for (sum, count) in pools {
        for _ in 0..count {
            out.push(sum / count as f64 + out.len() as f64 * gap);
        }
    }
    // Once round: the last must not run into the first.
    let over = out[n - 1] - out[0] + gap - TAU;
    if over > 0.0 {
        let (start, len) = (out[0] + over / 2.0, TAU - gap);
        let (a, b) = (out[0], out[n - 1]);
        for x in &mut out {
            *x = start + (*x - a) / (b - a) * len;
        }
    }
    let mut turned = vec![0.0; n];
    for (k, x) in out.into_iter().enumerate() {
        turned[(first + k) % n] = x;
    }
    turned
}

/// Every how manieth site gets its number so that numbers `room` apart fit on a rim where
/// sites are `spacing` apart: 1, 2, 5, 10, 20, 50 …
pub(super) fn stride(spacing: f64, room: f64) -> usize {
    let mut unit = 1;
    loop {
        for m in [1, 2, 5] {
            if (m * unit) as f64 * spacing >= room {
                return m * unit;
            }
        }
        unit *= 10;
        if unit > 1_000_000_000 {
            return unit;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        #[test]
        fn sites_keep_their_order_and_distance(
            mut natural in proptest::collection::vec(0.0..TAU, 3..60),
            turn in 0usize..60,
        ) {
            natural.sort_by(f64::total_cmp);
            let n = natural.len();
            natural.rotate_left(turn % n);
            let gap = TAU / n as f64 * 0.6;
            let out = spread(&natural, gap);
            let mut round = 0.0;
            for i in 0..n {
                let ahead = (out[(i + 1) % n] - out[i]).rem_euclid(TAU);
                prop_assert!(ahead > gap * 0.5, "sites {i} and next: {ahead} < {gap}");
                round += ahead;
            }
            prop_assert!((round - TAU).abs() < 1e-6, "round the rim once: {round}");
        }
    }

    #[test]
    fn sites_with_room_stay() {
        let natural = [0.1, 1.0, 2.0, 4.0];
        for (a, b) in spread(&natural, 0.2).iter().zip(natural) {
            assert!((a - b).rem_euclid(TAU).min((b - a).rem_euclid(TAU)) < 1e-12);
        }
    }

    #[test]
    fn numbers_are_thinned_in_round_steps() {
        assert_eq!([stride(30.0, 25.0), stride(13.0, 25.0), stride(1.0, 25.0)], [1, 2, 50]);
    }
}
