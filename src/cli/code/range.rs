//! Lists of numbers as the user writes them.

/// Rates: `0.1`, `0.1,0.2`, `0.05..0.6:0.05` (both ends taken).
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Rates(pub(super) Vec<f64>);

/// Rings: `3`, `1,3`, `1..4` (both ends taken).
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Rings(pub(super) Vec<u32>);

pub(super) fn rates(text: &str) -> Result<Rates, String> {
    let bad = |part: &str| {
        format!("{part:?} is no erasure rate; write for example 0.1,0.2 or 0.05..0.6:0.05")
    };
    let number = |part: &str| {
        part.trim().parse::<f64>().ok().filter(|p| (0.0..=1.0).contains(p)).ok_or_else(|| bad(part))
    };
    let mut out = Vec::new();
    for part in text.split(',') {
        match part.split_once("..") {
            None => out.push(number(part)?),
            Some((from, rest)) => {
                let (to, step) = rest.split_once(':').ok_or_else(|| {
                    format!("{part:?} needs a step; write for example 0.05..0.6:0.05")
                })?;
                let (from, to) = (number(from)?, number(to)?);
                let step: f64 =
                    step.trim().parse().ok().filter(|s| *s > 0.0).ok_or_else(|| bad(part))?;
                let steps = ((to - from) / step + 1e-9).floor();
                if !(0.0..=10_000.0).contains(&steps) {
                    return Err(format!("{part:?} names no rate, or more than 10000 of them"));
                }
                // Rounded so that 0.05 + 2·0.05 reads 0.15.
                let round = |x: f64| (x * 1e12).round() / 1e12;
                out.extend((0..=steps as u32).map(|i| round(from + f64::from(i) * step)));
            }
        }
    }
    out.sort_by(f64::total_cmp);
    out.dedup();
    Ok(Rates(out))
}

pub(super) fn rings(text: &str) -> Result<Rings, String> {
    let bad = |part: &str| format!("{part:?} is no number of rings; write for example 1..4");
    let number = |part: &str| part.trim().parse::<u32>().map_err(|_| bad(part));
    let mut out = Vec::new();
    for part in text.split(',') {
        match part.split_once("..") {
            None => out.push(number(part)?),
            Some((from, to)) => {
                let (from, to) = (number(from)?, number(to)?);
                if from > to || to - from > 1000 {
                    return Err(format!("{part:?} names no ring, or more than 1000 of them"));
                }
                out.extend(from..=to);
            }
        }
    }
    out.sort_unstable();
    out.dedup();
    Ok(Rings(out))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lists() {
        assert_eq!(rates("0.05..0.2:0.05").unwrap().0, [0.05, 0.1, 0.15, 0.2]);
        assert_eq!(rates("0.5,0.1").unwrap().0, [0.1, 0.5]);
        assert_eq!(rings("1..3,7").unwrap().0, [1, 2, 3, 7]);
        for bad in ["", "2", "-0.1", "0.1..0.3", "0.3..0.1:0.1", "0.1..0.2:0", "nan", "x"] {
            assert!(rates(bad).is_err(), "{bad:?}");
        }
        assert!(rings("3..1").is_err() && rings("").is_err() && rings("0..100000").is_err());
    }
}
