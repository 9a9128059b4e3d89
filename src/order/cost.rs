//! What a plan costs.

use super::magnitude::Magnitude;
use super::{OrderError, Plan, Shape};

/// The price of a plan, all slices together except where said.
///
/// # The convention
/// The executor counts by the same rules, and the two counts are equal.
/// 1. *Leaves.* Before any step each input tensor is brought into its leaf form: a label that
///    stands twice on it is reduced to its diagonal, and every label that no other tensor
///    holds and that is not open is summed over. Sliced labels are fixed and gone. This
///    counts no multiply-adds; a leaf's elements are those of this form.
/// 2. *Steps.* A step joins tensors with (distinct) labels A and B. It takes
///    ∏ size(l) over l ∈ A ∪ B multiply-adds. The result keeps a label of A ∪ B if it is open
///    or some other live tensor holds it; all others are summed in this step.
/// 3. *Live.* All leaves are alive from the start. A step's operands are alive together
///    with its result and end after it. The peak is the largest sum of the elements of live
///    tensors at any moment, in the plan's order of steps.
/// 4. *Written.* Elements written are those of the results of all steps.
/// 5. *Slices* repeat all of this; multiply-adds and elements written are those of one slice
///    times the number of slices. Adding up slices counts nothing.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Cost {
    /// log10 of the scalar multiply-adds; −∞ for none.
    pub log10_multiply_adds: f64,
    /// The scalar multiply-adds, where they fit.
    pub multiply_adds: Option<u128>,
    /// log2 of the most elements alive at once, in one slice.
    pub log2_peak_elements: f64,
    /// The most elements alive at once, in one slice, where they fit.
    pub peak_elements: Option<u128>,
    /// log2 of the elements of the largest tensor, leaves and result included, in one slice.
    pub log2_largest_tensor: f64,
    /// Most distinct labels in one pairwise step, in one slice.
    pub widest_step: usize,
    /// log2 of the elements written in all; −∞ for none.
    pub log2_elements_written: f64,
    /// Number of slices.
    pub slices: u128,
}

/// Prices a plan by the convention of [`Cost`].
///
/// Linear in the total number of labels met in all steps.
///
/// # Errors
/// [`OrderError`]: whatever [`Shape::check`] finds, or a plan that does not use each tensor
/// once, or slices an unknown label or one twice.
pub fn cost(shape: &Shape, plan: &Plan) -> Result<Cost, OrderError> {
    shape.check()?;
    let n = shape.tensors.len();
    if plan.steps.len() + 1 != n {
        return Err(OrderError::StepCount { found: plan.steps.len(), tensors: n });
    }
    let labels = shape.sizes.len();
    let mut sliced = vec![false; labels];
    let mut slices = 1u128;
    for l in &plan.sliced {
        match sliced.get_mut(l.index()) {
            None => {
                return Err(OrderError::SlicedUnknown { label: l.number(), labels });
            }
            Some(s) if *s => {
                return Err(OrderError::ListedTwice { label: l.number(), list: "sliced" });
            }
            Some(s) => *s = true,
        }
        slices = slices
            .checked_mul(u128::from(shape.sizes[l.index()]))
            .filter(|&s| s < 1 << 127)
            .ok_or(OrderError::TooManySlices)?;
    }
    let Leaves { sets, lone, mut left } = Leaves::of(shape, &sliced);
    let product =
        |set: &[u32]| set.iter().fold(Magnitude::ONE, |m, &l| m.times(shape.sizes[l as usize]));
    // A lone label stays on whatever its tensor becomes part of: only count and size matter.
    let mut live: Vec<Option<Live>> = sets
        .into_iter()
        .zip(lone)
        .map(|(set, lone)| {
            let lone_size = product(&lone);
            Some(Live {
                elements: lone_size.product(product(&set)),
                set,
                lone_size,
                lone: lone.len(),
            })
        })
        .collect();
    let mut alive = Magnitude::ZERO;
    let mut largest = Magnitude::ZERO;
    for leaf in live.iter().flatten() {
        alive = alive.plus(leaf.elements);
        largest = largest.max(leaf.elements);
    }
    let (mut peak, mut adds, mut written, mut widest) =
        (alive, Magnitude::ZERO, Magnitude::ZERO, 0);
    let mut union = Vec::new();
    for (step, &(a, b)) in plan.steps.iter().enumerate() {
        let mut take = |t: u32| {
            live.get_mut(t as usize)
                .and_then(Option::take)
                .ok_or(OrderError::StepTensor { step, tensor: t })
        };
        let (x, y) = (take(a)?, take(b)?);
        merge(&x.set, &y.set, &mut union);
        let lone = x.lone + y.lone;
        let lone_size = x.lone_size.product(y.lone_size);
        widest = widest.max(union.len() + lone);
        adds = adds.plus(product(&union).product(lone_size));
        let set = keep(&x.set, &y.set, &union, &mut left);
        let elements = product(&set).product(lone_size);
        written = written.plus(elements);
        largest = largest.max(elements);
        alive = alive.plus(elements);
        peak = peak.max(alive);
        alive = alive.minus(x.elements).minus(y.elements);
        live.push(Some(Live { set, lone, lone_size, elements }));
    }
    let adds = adds.times_count(slices);
    Ok(Cost {
        log10_multiply_adds: adds.log2() * std::f64::consts::LOG10_2,
        multiply_adds: adds.exact(),
        log2_peak_elements: peak.log2(),
        peak_elements: peak.exact(),
        log2_largest_tensor: largest.log2(),
        widest_step: widest,
        log2_elements_written: written.times_count(slices).log2(),
        slices,
    })
}

/// A tensor during pricing: shared labels one by one, lone open ones by count and size.
struct Live {
    set: Vec<u32>,
    lone: usize,
    lone_size: Magnitude,
    elements: Magnitude,
}

/// Every tensor in leaf form.
pub(super) struct Leaves {
    /// The labels of each tensor that other tensors hold too, sorted.
    pub sets: Vec<Vec<u32>>,
    /// The open labels that each tensor holds alone, sorted.
    pub lone: Vec<Vec<u32>>,
    /// For each label by how many live tensors it is held, open counting as one more.
    pub left: Vec<u32>,
}

impl Leaves {
    /// The leaf form where these labels are gone.
    pub fn of(shape: &Shape, gone: &[bool]) -> Self {
        let mut left = vec![0u32; shape.sizes.len()];
        let mut sets: Vec<Vec<u32>> = shape
            .tensors
            .iter()
            .map(|labels| {
                let mut set: Vec<u32> =
                    labels.iter().filter(|l| !gone[l.index()]).map(|l| l.number()).collect();
                set.sort_unstable();
                set.dedup();
                set.iter().for_each(|&l| left[l as usize] += 1);
                set
            })
            .collect();
        let mut open = vec![false; shape.sizes.len()];
        for l in &shape.open {
            open[l.index()] = true;
        }
        let lone = sets
            .iter_mut()
            .map(|set| {
                let lone = set
                    .iter()
                    .copied()
                    .filter(|&l| left[l as usize] == 1 && open[l as usize])
                    .collect();
                set.retain(|&l| left[l as usize] > 1);
                lone
            })
            .collect();
        for (l, &open) in left.iter_mut().zip(&open) {
            *l += u32::from(open);
        }
        Self { sets, lone, left }
    }
}

/// Union of two sorted lists.
pub(super) fn merge(x: &[u32], y: &[u32], union: &mut Vec<u32>) {
    union.clear();
    let (mut i, mut j) = (0, 0);
    while i < x.len() && j < y.len() {
        let (p, q) = (x[i], y[j]);
        union.push(p.min(q));
        i += usize::from(p <= q);
        j += usize::from(q <= p);
    }
    union.extend_from_slice(&x[i..]);
    union.extend_from_slice(&y[j..]);
}

/// The labels that the result keeps; `left` is brought up to date.
pub(super) fn keep(x: &[u32], y: &[u32], union: &[u32], left: &mut [u32]) -> Vec<u32> {
    // A label on both is held once less; then the result alone may hold it.
    let mut result = Vec::with_capacity(union.len());
    let (mut i, mut j) = (0, 0);
    for &l in union {
        let both = i < x.len() && x[i] == l && j < y.len() && y[j] == l;
        i += usize::from(i < x.len() && x[i] == l);
        j += usize::from(j < y.len() && y[j] == l);
        if both {
            left[l as usize] -= 1;
        }
        if left[l as usize] > 1 {
            result.push(l);
        }
    }
    result
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::tensor::Label;

    fn shape(sizes: &[u64], tensors: &[&[u32]], open: &[u32]) -> Shape {
        let l = |s: &[u32]| s.iter().map(|&n| Label::new(n)).collect::<Vec<_>>();
        Shape::new(sizes.to_vec(), tensors.iter().map(|t| l(t)).collect(), l(open)).unwrap()
    }
    fn plan(steps: &[(u32, u32)], sliced: &[u32]) -> Plan {
        Plan { steps: steps.to_vec(), sliced: sliced.iter().map(|&n| Label::new(n)).collect() }
    }

    #[test]
    fn a_matrix_chain() {
        // ab,bc,cd->ad with sizes 2,3,5,7
        let s = shape(&[2, 3, 5, 7], &[&[0, 1], &[1, 2], &[2, 3]], &[0, 3]);
        let c = cost(&s, &plan(&[(0, 1), (3, 2)], &[])).unwrap();
        assert_eq!(c.multiply_adds, Some(2 * 3 * 5 + 2 * 5 * 7));
        assert_eq!(c.widest_step, 3);
        // 6 + 15 + 35 with the first result 10; then 10 + 35 with the second result 14
        assert_eq!(c.peak_elements, Some(66));
        assert!((c.log2_elements_written - 24f64.log2()).abs() < 1e-12);
        assert!((c.log2_largest_tensor - 35f64.log2()).abs() < 1e-12);
    }

    #[test]
    fn hyperedges_diagonals_and_lone_labels() {
        // label 0 on three tensors; 1 twice on one; 2 on one tensor, summed there
        let s = shape(&[4, 3, 9], &[&[0, 1, 1], &[0, 2], &[0, 1]], &[]);
        let c = cost(&s, &plan(&[(0, 1), (3, 2)], &[])).unwrap();
        assert_eq!(c.multiply_adds, Some(12 + 12));
        // leaves 12, 4 and 12, first result 12
        assert_eq!(c.peak_elements, Some(40));
        let c = cost(&s, &plan(&[(0, 1), (3, 2)], &[0])).unwrap();
        assert_eq!((c.slices, c.multiply_adds), (4, Some(4 * 6)));
    }

    #[test]
    fn scalars_and_separate_parts() {
        let s = shape(&[2, 2], &[&[], &[0], &[0], &[1]], &[1]);
        let c = cost(&s, &plan(&[(1, 2), (0, 4), (5, 3)], &[])).unwrap();
        assert_eq!(c.multiply_adds, Some(2 + 1 + 2));
        assert_eq!(c.widest_step, 1);
    }

    #[test]
    fn bad_plans_are_refused() {
        let s = shape(&[2], &[&[0], &[0]], &[]);
        assert_eq!(cost(&s, &plan(&[], &[])), Err(OrderError::StepCount { found: 0, tensors: 2 }));
        assert_eq!(
            cost(&s, &plan(&[(0, 0)], &[])),
            Err(OrderError::StepTensor { step: 0, tensor: 0 })
        );
        assert_eq!(
            cost(&s, &plan(&[(0, 2)], &[])),
            Err(OrderError::StepTensor { step: 0, tensor: 2 })
        );
        assert_eq!(
            cost(&s, &plan(&[(0, 1)], &[7])),
            Err(OrderError::SlicedUnknown { label: 7, labels: 1 })
        );
    }
}
