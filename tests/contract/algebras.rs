//! A plan on an algebra from outside the library.

use super::{block, random_plan, random_problem, slow};
use lierne::block::Block;
use lierne::contract::{Algebra, ContractError, Leaf, Problem, Step, on_algebra};
use lierne::order::{Plan, Shape};
use lierne::tensor::{Dense, Label};
use lierne::watch::Silent;
use ndarray::{ArrayD, IxDyn};

/// Integers of 128 bits, by the definition of a sum over all labels.
struct Integers<'a>(&'a Shape);

struct Table {
    labels: Vec<Label>,
    values: ArrayD<i128>,
}

impl Integers<'_> {
    fn dims(&self, labels: &[Label]) -> Vec<usize> {
        labels.iter().map(|l| self.0.sizes[l.index()] as usize).collect()
    }
    /// Σ over the labels of `all` that are not in `keep` of the product of the tables.
    fn sum(&self, tables: &[&Table], all: &[Label], keep: &[Label]) -> Table {
        let mut values = ArrayD::zeros(IxDyn(&self.dims(keep)));
        let sizes = self.dims(all);
        // How far each table and the result step along each label of `all`.
        let steps = |labels: &[Label], strides: &[isize]| -> Vec<usize> {
            // A label that stands twice steps along both of its axes.
            all.iter()
                .map(|l| {
                    let axes = (0..labels.len()).filter(|&i| labels[i] == *l);
                    axes.map(|i| strides[i] as usize).sum()
                })
                .collect()
        };
        let out = steps(keep, values.strides());
        let from: Vec<(Vec<usize>, Vec<i128>)> = tables
            .iter()
            .map(|t| {
                let values = t.values.as_standard_layout().to_owned();
                (steps(&t.labels, values.strides()), values.into_raw_vec_and_offset().0)
            })
            .collect();
        let flat = values.as_slice_mut().unwrap();
        let at = |index: &[usize], steps: &[usize]| -> usize {
            index.iter().zip(steps).map(|(i, s)| i * s).sum()
        };
        let mut index = vec![0; all.len()];
        for _ in 0..sizes.iter().product::<usize>() {
            flat[at(&index, &out)] += from.iter().map(|(s, v)| v[at(&index, s)]).product::<i128>();
            for i in (0..all.len()).rev() {
                index[i] += 1;
                if index[i] < sizes[i] {
                    break;
                }
                index[i] = 0;
            }
        }
        Table { labels: keep.to_vec(), values }
    }
}

impl Algebra for Integers<'_> {
    type Tensor = Table;
    fn leaf(
        &self,
        _: usize,
        leaf: &Leaf,
        block: &Block,
        _: &[(Label, usize)],
    ) -> Result<Table, ContractError> {
        let values = block.entries().to_dense().to_complex().mapv(|x| x.re as i128);
        let mut distinct = leaf.axes.clone();
        distinct.sort();
        distinct.dedup();
        Ok(self.sum(&[&Table { labels: leaf.axes.clone(), values }], &distinct, &leaf.labels))
    }
    fn join(&self, _: usize, step: &Step, a: Table, b: Table) -> Result<Table, ContractError> {
        let keep = [&step.batch[..], &step.rows, &step.columns].concat();
        let all = [&keep[..], &step.sum].concat();
        Ok(self.sum(&[&a, &b], &all, &keep))
    }
    fn cost(&self, _: usize, step: &Step, _: &Table, _: &Table) -> f64 {
        step.multiply_adds as f64
    }
}

#[test]
fn an_algebra_of_exact_integers_agrees_with_the_definition() {
    for seed in 0..60 {
        let mut problem = random_problem(seed, false);
        problem.blocks = problem
            .blocks
            .iter()
            .map(|b| {
                let a = b.entries().to_dense().to_complex();
                block(Dense::Real(a.mapv(|x| (x.re * 4.0).round())))
            })
            .collect();
        let plan = random_plan(&problem, seed);
        let table = on_algebra(&problem, &plan, &Integers(&problem.shape), &Silent).unwrap();
        let order: Vec<usize> = problem
            .shape
            .open
            .iter()
            .map(|l| table.labels.iter().position(|x| x == l).unwrap())
            .collect();
        let got = table.values.permuted_axes(IxDyn(&order)).mapv(|x| x as f64);
        assert_eq!(got, slow(&problem).mapv(|x| x.re), "seed {seed}");
    }
}

/// Domino tilings of the 12 × 12 square, more than 2^53 of them, to the last digit: OEIS
/// A004003.
#[test]
fn a_count_beyond_doubles() {
    let n = 12;
    let mut tensors: Vec<Vec<Label>> = vec![Vec::new(); n * n];
    let mut labels = 0;
    let mut bond = |a: usize, b: usize| {
        tensors[a].push(Label::new(labels));
        tensors[b].push(Label::new(labels));
        labels += 1;
    };
    for i in 0..n {
        for j in 0..n {
            if j + 1 < n {
                bond(i * n + j, i * n + j + 1);
            }
            if i + 1 < n {
                bond(i * n + j, (i + 1) * n + j);
            }
        }
    }
    let blocks = tensors
        .iter()
        .map(|t| {
            block(Dense::Real(ArrayD::from_shape_fn(IxDyn(&vec![2; t.len()]), |i| {
                let filled: usize = ndarray::Dimension::slice(&i).iter().sum();
                f64::from(u8::from(filled == 1))
            })))
        })
        .collect();
    let all = (n * n) as u32;
    let steps = (1..all).map(|t| (if t == 1 { 0 } else { all + t - 2 }, t)).collect();
    let shape = Shape { sizes: vec![2; labels as usize], tensors, open: vec![] };
    let problem = Problem { shape, blocks };
    let plan = Plan { steps, sliced: vec![] };
    let table = on_algebra(&problem, &plan, &Integers(&problem.shape), &Silent).unwrap();
    assert_eq!(table.values[IxDyn(&[])], 53_060_477_521_960_000);
}
