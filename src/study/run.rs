//! The run of a study: every question once, the cheap ones first.

use super::answer::{Answer, Evidence};
use super::ask::{self, CaseAsker, Measure, Terms};
use super::journal::{self, Journal};
use super::questions::{self, Finding, Question};
use super::regions::{self, Asked};
use super::{Case, StudyError, StudyFile, case};
use crate::entropy::{EntropyError, Wires};
use crate::network::{Network, Region};
use crate::watch::{News, Watch};
use std::path::Path;

/// What the run may use, after defaults.
#[derive(Debug, Clone, PartialEq)]
pub struct Limits {
    /// Bytes that a contraction may hold at its peak.
    pub memory: u64,
    /// Multiply-adds that one core may cost.
    pub multiply_adds: f64,
    /// Seconds for the whole run, by the caller's clock.
    pub seconds: f64,
}

impl Limits {
    /// Multiply-adds a core where the study says nothing: about half a minute of one core.
    pub const MULTIPLY_ADDS: f64 = 2e11;

    /// The study's own, with this memory where it names none.
    ///
    /// # Errors
    /// [`StudyError::Value`].
    pub fn of(file: &StudyFile, memory: u64) -> Result<Self, StudyError> {
        Ok(Self {
            memory: file.memory()?.unwrap_or(memory),
            multiply_adds: file.budget.multiply_adds.unwrap_or(Self::MULTIPLY_ADDS),
            seconds: file.budget.seconds.unwrap_or(f64::INFINITY),
        })
    }
}

/// A case with its network, what was asked of it and what was answered.
#[derive(Debug, Clone)]
pub struct CaseOutcome {
    /// The case.
    pub case: Case,
    /// Its network.
    pub network: Network,
    /// The regions, in the order in which they are reported.
    pub asked: Vec<Asked>,
    /// Their answers; none for one that the run did not come to.
    pub answers: Vec<Option<Answer>>,
    /// The other questions.
    pub questions: Vec<Question>,
    /// Their answers.
    pub findings: Vec<Option<Finding>>,
}

/// What a run has found.
#[derive(Debug, Clone)]
pub struct Outcome {
    /// The cases in the order of the study.
    pub cases: Vec<CaseOutcome>,
    /// Answers that an earlier run had left.
    pub kept: usize,
    /// Answers asked for.
    pub total: usize,
    /// Answers at hand.
    pub done: usize,
}

impl Outcome {
    /// Whether every question has its answer.
    pub fn complete(&self) -> bool {
        self.done == self.total
    }
}

/// The networks of a study and the regions asked of each, with no answers yet.
///
/// # Errors
/// Those of [`case::all`], [`ask::network`] and [`regions::all`].
pub fn prepare(file: &StudyFile, watch: &dyn Watch) -> Result<Vec<CaseOutcome>, StudyError> {
    watch.tell(News::Stage("networks"));
    let mut out = Vec::new();
    for case in case::all(file)? {
        let network = ask::network(&case)?;
        let asked = match &file.entropies {
            Some(e) => regions::all(e, &network, &case.id, file.seed)?,
            None => Vec::new(),
        };
        let answers = vec![None; asked.len()];
        let questions = questions::all(file)?;
        let findings = vec![None; questions.len()];
        for q in &questions {
            if let Question::Recovery { region } = q {
                Region::parse(region, &network).map_err(|e| StudyError::Region {
                    case: case.id.clone(),
                    message: e.to_string(),
                })?;
            }
        }
        out.push(CaseOutcome { case, network, asked, answers, questions, findings });
    }
    Ok(out)
}

/// Regions that are asked together where no contraction is needed.
const TOGETHER: usize = 1024;

/// Answers every region of a prepared study, going on from what the folder's journal holds.
///
/// Case by case, first every region is asked, many at a time, with no contraction allowed;
/// those that come back as bounds are then contracted one after another, small cores first,
/// each with the whole memory and all threads. `partial` is called now and then with what is
/// at hand.
///
/// # Errors
/// [`StudyError::Question`], [`StudyError::Write`]. A stop or the end
/// of the time is no error: the outcome is then not complete.
pub fn run(
    file: &StudyFile,
    prepared: Vec<CaseOutcome>,
    limits: &Limits,
    folder: &Path,
    watch: &dyn Watch,
    mut partial: impl FnMut(&Outcome) -> Result<(), StudyError>,
) -> Result<Outcome, StudyError> {
    let journal = Journal::open(folder)?;
    let terms = terms(file, limits);
    let total = prepared.iter().map(|c| c.asked.len() + c.questions.len()).sum();
    let mut outcome = Outcome { cases: prepared, kept: 0, total, done: 0 };
    let keys: Vec<Vec<String>> =
        outcome.cases.iter().map(|c| c.asked.iter().map(|a| key(c, a, &terms)).collect()).collect();
    for c in &mut outcome.cases {
        for (slot, question) in c.findings.iter_mut().zip(&c.questions) {
            *slot = journal.get(&question_key(&c.case, question, limits));
            outcome.kept += usize::from(slot.is_some());
        }
    }
    for (c, keys) in outcome.cases.iter_mut().zip(&keys) {
        for (slot, key) in c.answers.iter_mut().zip(keys) {
            *slot = journal.get(key);
            outcome.kept += usize::from(slot.is_some());
        }
    }
    outcome.done = outcome.kept;
    let watch = Study { outer: watch, until: limits.seconds };
    let mut told = watch.seconds();
    for (at, keys) in keys.iter().enumerate() {
        let c = &outcome.cases[at];
        let mut open: Vec<usize> = (0..c.asked.len()).filter(|&r| c.answers[r].is_none()).collect();
        if open.is_empty() || watch.stop() {
            continue;
        }
        watch.outer.tell(News::Stage(&c.case.id));
        let network = c.network.clone();
        let wires = Wires::of(&network);
        let asker = CaseAsker::new(&wires, terms.clone());
        let mut costly: Vec<(u64, usize)> = Vec::new();
        while !open.is_empty() && !watch.stop() {
            let some: Vec<usize> = open.drain(..open.len().min(TOGETHER)).collect();
            let regions: Vec<Region> =
                some.iter().map(|&r| outcome.cases[at].asked[r].region.clone()).collect();
            let answers = match asker.cheap(&regions, &watch) {
                Ok(a) => a,
                Err(EntropyError::Stopped { .. }) => break,
                Err(e) => return Err(question(&outcome.cases[at], some[0], &e)),
            };
            for (r, a) in some.into_iter().zip(answers) {
                if a.evidence == Evidence::Bounds {
                    costly.push((a.core_tensors, r));
                } else {
                    journal.put(&keys[r], &a)?;
                    outcome.cases[at].answers[r] = Some(a);
                    outcome.done += 1;
                }
            }
            watch.count(&outcome);
        }
        costly.sort_unstable();
        for (_, r) in costly {
            if watch.stop() {
                break;
            }
            let answer = match asker.full(&outcome.cases[at].asked[r].region, &watch) {
                Ok(a) => a,
                Err(EntropyError::Stopped { .. }) => break,
                Err(e) => return Err(question(&outcome.cases[at], r, &e)),
            };
            if answer.evidence == Evidence::Bounds && watch.stop() {
                // Not the budget of the region but the end of the run left it open.
                break;
            }
            journal.put(&keys[r], &answer)?;
            outcome.cases[at].answers[r] = Some(answer);
            outcome.done += 1;
            watch.count(&outcome);
            if watch.seconds() - told > 15.0 {
                told = watch.seconds();
                partial(&outcome)?;
            }
        }
    }
    for at in 0..outcome.cases.len() {
        for q in 0..outcome.cases[at].questions.len() {
            let c = &outcome.cases[at];
            if c.findings[q].is_some() || watch.stop() {
                continue;
            }
            let question = &c.questions[q];
            watch.outer.tell(News::Stage(&format!("{}: {}", c.case.id, question.words())));
            watch.count(&outcome);
            let found = questions::answer(question, &c.network, limits.memory, &watch)?;
            if let Some(finding) = found {
                journal.put(&question_key(&c.case, question, limits), &finding)?;
                outcome.cases[at].findings[q] = Some(finding);
                outcome.done += 1;
            }
        }
    }
    Ok(outcome)
}

/// The terms on which the regions of a study are asked.
pub(super) fn terms(file: &StudyFile, limits: &Limits) -> Terms {
    let wanted = file.entropies.clone().unwrap_or_default();
    Terms {
        memory: limits.memory,
        log10_multiply_adds: limits.multiply_adds.log10(),
        spectrum: wanted.spectra,
        measures: wanted.measures.iter().filter_map(|m| Measure::parse(m)).collect(),
        seed: file.seed,
    }
}

/// The study's own progress instead of that of its parts; the end of the time is a stop.
struct Study<'a> {
    outer: &'a dyn Watch,
    until: f64,
}

impl Study<'_> {
    fn count(&self, outcome: &Outcome) {
        self.outer.tell(News::Progress { done: outcome.done as u64, total: outcome.total as u64 });
    }
}

impl Watch for Study<'_> {
    fn seconds(&self) -> f64 {
        self.outer.seconds()
    }
    fn stop(&self) -> bool {
        self.outer.stop() || self.outer.seconds() > self.until
    }
}

fn question(c: &CaseOutcome, r: usize, error: &EntropyError) -> StudyError {
    StudyError::Question {
        case: c.case.id.clone(),
        question: format!("region {}", c.asked[r].region.show(&c.network)),
        message: error.to_string(),
    }
}

/// Everything that the answer to a question depends on.
fn question_key(case: &Case, question: &Question, limits: &Limits) -> String {
    journal::key(&[
        env!("CARGO_PKG_VERSION"),
        &case.digest,
        &question.key(),
        &limits.memory.to_string(),
    ])
}

/// Everything that the answer about a region depends on.
fn key(c: &CaseOutcome, asked: &Asked, terms: &Terms) -> String {
    journal::key(&[
        "entropy",
        env!("CARGO_PKG_VERSION"),
        &c.case.digest,
        &asked.region.show(&c.network),
        &terms.memory.to_string(),
        &terms.log10_multiply_adds.to_string(),
        &terms.spectrum.to_string(),
        &terms.measures.iter().map(|m| m.name.as_str()).collect::<Vec<_>>().join(","),
        &terms.seed.to_string(),
    ])
}
