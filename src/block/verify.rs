//! Every built-in proof, run again on demand.

use super::{Block, Exact, IsometryTable, Request, make};
use crate::watch::{News, Watch};

/// The outcome of one proof.
#[derive(Debug, Clone, PartialEq)]
pub struct Verified {
    /// The block's name.
    pub name: String,
    /// Dimensions of its legs.
    pub dims: Vec<usize>,
    /// How the table was proven, and what was compared besides.
    pub how: String,
    /// `None` where everything agreed, else the fault.
    pub fault: Option<String>,
}

/// Steps of an exact comparison of table and entries that are still taken.
const MOST_STEPS: u128 = 1 << 23;

/// What [`verify`] runs through: every family, every construction, at many dimensions.
pub fn verify_requests() -> Vec<Request> {
    let mut out = Vec::new();
    let mut add = |family: &str, dims: Vec<usize>, construction: Option<&str>| {
        let construction = construction.map(str::to_owned);
        out.push(Request { construction, ..Request::new(family, dims) });
    };
    for d in 3..=100 {
        for (name, _) in super::family::four_leg_constructions(d) {
            add("four-leg", vec![d; 4], Some(name));
        }
    }
    for d in 2..=16 {
        add("five-leg", vec![d; 5], None);
        add("six-leg", vec![d; 6], None);
    }
    for d in [3, 4, 5, 7, 8, 9, 11, 12, 13, 15, 16, 27, 32] {
        add("seven-leg", vec![d; 7], None);
    }
    for d in [5, 7, 8, 9, 11, 13, 16, 25, 35] {
        add("eight-leg", vec![d; 8], None);
    }
    for (legs, d) in [(7, 7), (7, 8), (8, 7), (8, 8), (8, 9)] {
        for construction in ["graph", "mds"] {
            let family = if legs == 7 { "seven-leg" } else { "eight-leg" };
            if (legs, d) != (7, 7) || construction == "mds" {
                add(family, vec![d; legs], Some(construction));
            }
        }
    }
    for (legs, d) in [(9, 3), (10, 3)] {
        add("perfect", vec![d; legs], None);
    }
    for (legs, d) in [(4, 3), (5, 4), (6, 5), (9, 8), (10, 9), (11, 11), (12, 11), (12, 13)] {
        add("mds", vec![d; legs], None);
    }
    for d in [2, 3, 4, 5, 6, 7, 8, 9, 10] {
        add("code-4-2-2", vec![d, d, d, d, d * d], None);
        add("code-5-1-3", vec![d; 6], None);
        add("copy", vec![d; 4], None);
        add("bell", vec![d; 2], None);
        add("identity", vec![d; 4], None);
        add("basis", vec![d], None);
        add("plus", vec![d], None);
    }
    add("code-4-2-2", vec![2; 6], None);
    add("code-6-1-3", vec![2; 7], None);
    add("code-7-1-3", vec![2; 8], None);
    for n in 2..=8 {
        add("w", vec![2; n], None);
        add("dicke", vec![2; n], None);
    }
    out
}

/// Makes the block, which proves its table, and where this is affordable compares the table
/// with its exact entries, set by set, in cyclotomic integers.
pub fn verify(request: &Request) -> Verified {
    match make(request) {
        Ok(block) => judge(&block),
        Err(fault) => Verified {
            name: request.family.clone(),
            dims: request.dims.clone(),
            how: "not made".to_owned(),
            fault: Some(fault.to_string()),
        },
    }
}

fn judge(block: &Block) -> Verified {
    let mut out = Verified {
        name: block.name().to_owned(),
        dims: block.dims().to_vec(),
        how: block.proof().to_string(),
        fault: None,
    };
    if block.nonzeros() > 1 << 16 {
        return out;
    }
    let Some(exact) = block.exact() else { return out };
    let masks = asked(block.isometries(), block.dims());
    let steps: u128 = masks.iter().map(|&m| cost(&exact, m)).sum();
    if steps > MOST_STEPS {
        return out;
    }
    for mask in masks {
        let claimed = block.isometries().is_isometry(mask);
        if exact.is_isometry(mask) != claimed {
            out.fault = Some(format!(
                "the table says {claimed} for legs {:?}, the entries the opposite",
                super::stabilizer_tensor::legs_of(mask)
            ));
            return out;
        }
    }
    out.how.push_str("; entries agree in cyclotomic integers");
    out
}

/// The sets that decide a table: for a perfect one the largest sets, else every set with no
/// more levels than its complement.
fn asked(table: &IsometryTable, dims: &[usize]) -> Vec<u64> {
    let n = dims.len();
    if table.is_perfect() && n > 1 {
        return super::stabilizer_tensor::halves(n).collect();
    }
    let level =
        |m: u64| -> u128 { (0..n).filter(|l| m >> l & 1 == 1).map(|l| dims[l] as u128).product() };
    let all = (1u64 << n) - 1;
    (1..=all).filter(|&m| level(m) <= level(all & !m)).collect()
}

/// Pairs of entries that share a row, taking rows to be filled evenly.
fn cost(exact: &Exact, mask: u64) -> u128 {
    let rows: u128 = (0..exact.dims.len())
        .filter(|l| mask >> l & 1 == 0)
        .map(|l| exact.dims[l] as u128)
        .product();
    let entries = exact.len() as u128;
    entries * entries.div_ceil(rows).max(1) * u128::from(exact.root).div_ceil(4)
}

/// Runs all proofs, telling each outcome as it comes, in order.
pub fn verify_all(watch: &dyn Watch, mut tell: impl FnMut(&Verified)) -> bool {
    let requests = verify_requests();
    let total = requests.len() as u64;
    let mut good = true;
    watch.tell(News::Stage("proofs"));
    for (k, request) in requests.iter().enumerate() {
        let outcome = verify(request);
        good &= outcome.fault.is_none();
        tell(&outcome);
        watch.tell(News::Progress { done: k as u64 + 1, total });
        if watch.stop() {
            return false;
        }
    }
    good
}
