//! Writing and checking certificates.

use super::super::common::write_file;
use super::super::{Common, Failure, Verdict};
use crate::entropy::{Asker, Certificate, Wires};
use crate::network::{Limits, Region, load};
use serde_json::json;
use std::path::Path;

/// Writes the certificate of a region.
pub(super) fn write(asker: &Asker<'_, '_>, region: &Region, path: &Path) -> Result<(), Failure> {
    let (closure, cut) = asker.close(&asker.wires().inside(region));
    let certificate = Certificate::record(asker.wires(), region, &closure, &cut);
    let mut text = serde_json::to_vec_pretty(&certificate)?;
    text.push(b'\n');
    write_file(path, &text)
}

/// Checks a certificate against a network.
pub(super) fn verify(network: &Path, path: &Path, common: &Common) -> Result<Verdict, Failure> {
    let network = load(network, &Limits::default())?;
    let place = path.display();
    let text = std::fs::read_to_string(path)
        .map_err(|e| Failure::new(format!("cannot read {place}: {e}")))?;
    let certificate: Certificate = serde_json::from_str(&text)
        .map_err(|e| Failure::new(format!("{place} is no certificate: {e}")))?;
    let verdict = certificate.verify(&Wires::of(&network));
    if common.json {
        common.say_json(&json!({
            "certificate": place.to_string(),
            "region": certificate.region,
            "holds": verdict.is_ok(),
            "reason": verdict.as_ref().err().map(ToString::to_string),
            "core": certificate.core.len(),
            "lower_nats": certificate.lower_nats,
            "upper_nats": certificate.upper_nats,
        }))?;
    } else {
        match &verdict {
            Ok(()) if certificate.core.is_empty() => common.say(format_args!(
                "holds: S({}) = {} nats",
                certificate.region, certificate.upper_nats
            )),
            Ok(()) => common.say(format_args!(
                "holds: S({}) is at least {} and at most {} nats; a core of {} tensors is open",
                certificate.region,
                certificate.lower_nats,
                certificate.upper_nats,
                certificate.core.len()
            )),
            Err(e) => common.say(format_args!("does not hold: {e}")),
        }
    }
    Ok(if verdict.is_ok() { Verdict::Yes } else { Verdict::No })
}
