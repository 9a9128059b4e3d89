//! `lierne code NET push`.

use super::{Code, Common, Failure, Verdict, leg};
use crate::block::{read_npy, write_npy};
use crate::code::push::{self, Product, Pushed};
use crate::code::{Budget, CodeError, pauli};
use crate::network::Region;
use crate::tensor::Dense;
use ndarray::{Array2, Ix2};
use num_complex::Complex64;
use serde_json::json;
use std::path::{Path, PathBuf};

/// Relative miss up to which an array counts as the operator.
const TOLERANCE: f64 = 1e-9;

/// Arguments of `push`.
#[derive(Debug, clap::Args)]
pub(super) struct Args {
    /// The bulk leg by name, or `centre`
    #[arg(long, value_name = "LEG")]
    leg: String,
    /// X, Z, a product such as X2Z (one word a digit of the leg), or a NumPy file with a
    /// square array
    #[arg(long, value_name = "X|Z|FILE")]
    operator: String,
    /// Boundary sites that may carry it
    #[arg(long, value_name = "REGION")]
    region: String,
    /// Write the operator as an array over the region's legs (small networks only)
    #[arg(long, value_name = "FILE.npy")]
    out: Option<PathBuf>,
}

pub(super) fn run(code: &Code<'_>, args: &Args, common: &Common) -> Result<Verdict, Failure> {
    let region = Region::parse(&args.region, code.network())?;
    let k = leg(code, &args.leg)?;
    let outcome = if code.is_stabilizer() && args.out.is_none() {
        exact(code, args, &region, k, common)
    } else {
        array(code, args, &region, k, common)
    };
    match outcome {
        Err(Asked::No(e)) => {
            // Refused with the reason: a clear negative answer.
            if common.json {
                common.say_json(&json!({
                    "leg": code.bulk_name(k),
                    "operator": args.operator,
                    "region": region.show(code.network()),
                    "possible": false,
                    "reason": e.to_string(),
                }))?;
            } else {
                common.say(e);
            }
            Ok(Verdict::No)
        }
        Err(Asked::Failed(f)) => Err(f),
        Ok(()) => Ok(Verdict::Yes),
    }
}

enum Asked {
    No(CodeError),
    Failed(Failure),
}

impl From<CodeError> for Asked {
    fn from(e: CodeError) -> Self {
        match e {
            CodeError::CannotHold { .. } | CodeError::Defect { .. } => Self::No(e),
            other => Self::Failed(other.into()),
        }
    }
}

impl From<Failure> for Asked {
    fn from(f: Failure) -> Self {
        Self::Failed(f)
    }
}

fn is_file(text: &str) -> bool {
    Path::new(text).extension().is_some_and(|e| e.eq_ignore_ascii_case("npy"))
}

fn exact(
    code: &Code<'_>,
    args: &Args,
    region: &Region,
    k: usize,
    common: &Common,
) -> Result<(), Asked> {
    let pushed: Pushed = if is_file(&args.operator) {
        push::expanded(code, region, k, &square(Path::new(&args.operator))?)?
    } else {
        let digits = push::digits(code, k)?;
        let powers = pauli::parse(&args.operator, &digits).map_err(Failure::from)?;
        push::pauli(code, region, k, &powers)?
    };
    if common.json {
        common.say_json(&json!({
            "leg": code.bulk_name(k),
            "operator": args.operator,
            "region": region.show(code.network()),
            "possible": true,
            "terms": pushed.terms,
            "commutation_checks": pushed.verified_against,
            "evidence": "finite-field",
        }))?;
        return Ok(());
    }
    for t in &pushed.terms {
        common.say(words(t));
    }
    common.say(format_args!(
        "commutes with all {} generators of the state (evidence: finite-field)",
        pushed.verified_against
    ));
    Ok(())
}

/// `+i · X@3 Z2@7`; a second digit of a leg is written `X@3.1`.
fn words(t: &Product) -> String {
    let coefficient = match t.coefficient {
        [1.0, 0.0] => "+1".to_owned(),
        [-1.0, 0.0] => "-1".to_owned(),
        [0.0, 1.0] => "+i".to_owned(),
        [0.0, -1.0] => "-i".to_owned(),
        [re, im] => format!("({re:+.12}{im:+.12}i)"),
    };
    let mut out = coefficient;
    for f in &t.factors {
        let power = |letter: &str, e: u32| match e {
            0 => String::new(),
            1 => letter.to_owned(),
            e => format!("{letter}{e}"),
        };
        let digit = if f.digit == 0 { String::new() } else { format!(".{}", f.digit) };
        out += &format!(" {}{}@{}{digit}", power("X", f.x), power("Z", f.z), f.site);
    }
    out
}

fn array(
    code: &Code<'_>,
    args: &Args,
    region: &Region,
    k: usize,
    common: &Common,
) -> Result<(), Asked> {
    let dim = code.network().dim(code.network().bulk()[k]);
    let operator = match args.operator.as_str() {
        text if is_file(text) => square(Path::new(text))?,
        "X" | "x" => push::shift_or_clock(dim, true),
        "Z" | "z" => push::shift_or_clock(dim, false),
        other => {
            return Err(Failure::new(format!(
                "operator {other:?} is not understood for an array; write X, Z or a NumPy file"
            ))
            .into());
        }
    };
    let pushed = push::array(code, region, k, &operator, TOLERANCE, &Budget::default(), common)?;
    if let Some(path) = &args.out {
        write_npy(path, &Dense::Complex(pushed.operator.clone().into_dyn()))
            .map_err(Failure::from)?;
    }
    if common.json {
        common.say_json(&json!({
            "leg": code.bulk_name(k),
            "operator": args.operator,
            "region": region.show(code.network()),
            "possible": true,
            "rows": pushed.operator.nrows(),
            "defect": pushed.defect,
            "evidence": "contraction",
            "out": args.out,
        }))?;
    } else {
        common.say(format_args!(
            "array of {0} × {0} on {1}, defect {2:.3e} (evidence: contraction)",
            pushed.operator.nrows(),
            region.show(code.network()),
            pushed.defect
        ));
        match &args.out {
            Some(path) => common.say(format_args!("written to {}", path.display())),
            None => common.say("give --out FILE.npy to keep it"),
        }
    }
    Ok(())
}

fn square(path: &Path) -> Result<Array2<Complex64>, Failure> {
    let data = read_npy(path)?.to_complex();
    let shape = data.shape().to_vec();
    data.into_dimensionality::<Ix2>().map_err(|_| {
        Failure::new(format!(
            "{} holds an array of shape {shape:?}; an operator is a square array",
            path.display()
        ))
    })
}
