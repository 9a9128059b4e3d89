//! `lierne code NET isometry`.

use super::{Code, Common, Failure, Verdict, count, listed, names};
use crate::code::Budget;
use crate::code::isometry::judge;
use serde_json::json;

/// Arguments of `isometry`.
#[derive(Debug, clap::Args)]
pub(super) struct Args {}

pub(super) fn run(code: &Code<'_>, _: &Args, common: &Common) -> Result<Verdict, Failure> {
    let answer = judge(code, &Budget::default(), common)?;
    let blamed = names(code, &answer.blamed);
    if common.json {
        let lost: Vec<_> = answer
            .lost_digits
            .iter()
            .map(|&(prime, digits)| json!({"prime": prime, "digits": digits}))
            .collect();
        common.say_json(&json!({
            "boundary": answer.boundary,
            "bulk": answer.bulk,
            "rate": answer.rate,
            "isometry": answer.isometry,
            "evidence": answer.evidence,
            "blamed": blamed,
            "kernel_dimension": answer.kernel.map(count),
            "lost_digits": lost,
            "defect": answer.defect,
            "rings": answer.rings,
        }))?;
    } else {
        common
            .say(format_args!("[[{},{}]], rate {:.6}", answer.boundary, answer.bulk, answer.rate));
        let word = match answer.isometry {
            Some(true) => "is an isometry",
            Some(false) => "is no isometry",
            None => "could not be judged within the budget",
        };
        common.say(format_args!("bulk to boundary {word} (evidence: {})", answer.evidence));
        if answer.isometry != Some(true) {
            common.say(format_args!("bulk legs to blame: {}", listed(&blamed)));
            if let Some(k) = answer.kernel {
                common.say(format_args!("dimension of the kernel: {k}"));
            }
            if let Some(d) = answer.defect {
                common.say(format_args!("spread of the singular values: {d:.3e}"));
            }
        }
        if !answer.rings.is_empty() {
            common.say("ring  tensors  boundary      bulk      rate");
            for r in &answer.rings {
                common.say(format_args!(
                    "{:>4}{:>9}{:>10}{:>10}{:>10.6}",
                    r.ring, r.tensors, r.boundary, r.bulk, r.rate
                ));
            }
        }
    }
    Ok(if answer.isometry == Some(false) { Verdict::No } else { Verdict::Yes })
}
