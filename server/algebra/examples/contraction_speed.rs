//! Contracts on demand and tells how long it took: one half of `tests/references/contraction_speed.py`, whose other
//! half is NumPy.
//!
//! One line of JSON in, one out. `{ "subscripts": "ab,bc->ac", "operands": [{ "shape", "entries" }] }` sets the
//! contraction, whose entries are residues, and is answered by `{ "values" }`; `{ "calls": 100 }` is answered by the
//! `{ "nanoseconds" }` of so many calls of `contract`, and with `"planned": true` of so many evaluations of a plan
//! that was made once before.
//!
//! Trap: the residues are whole ones. Small entries would spare the sums of products their reductions, and zeros the
//! products themselves.

#![allow(clippy::unwrap_used)]

use std::hint::black_box;
use std::io::{BufRead, Write};
use std::sync::Arc;
use std::time::Instant;

use indexwise_algebra::contraction::{Factor, Label, MULTIPLICATIONS_BUDGET, contract, evaluated, planned};
use indexwise_algebra::field::{FIRST, Residue};
use indexwise_algebra::jet::Ring;
use indexwise_algebra::tensor::Tensor;
use serde_json::{Value, json};

type Number = Residue<FIRST>;

/// A contraction that calls are made of.
#[derive(Default)]
struct Case {
    tensors: Vec<Tensor<Number>>,
    labels: Vec<Vec<Label>>,
    free: Vec<Label>,
}

impl Case {
    fn new(order: &Value) -> Self {
        let ring = Ring::new(0, 0).unwrap();
        let (factors, free) = order["subscripts"].as_str().unwrap().split_once("->").unwrap();
        let tensors = order["operands"].as_array().unwrap().iter().map(|operand| array(&ring, operand)).collect();
        Self { tensors, labels: factors.split(',').map(labels).collect(), free: labels(free) }
    }

    fn factors(&self) -> Vec<Factor<'_, Number>> {
        self.tensors.iter().zip(&self.labels).map(|(tensor, labels)| (tensor, &labels[..])).collect()
    }

    fn values(&self) -> Vec<u64> {
        let result = contract(&self.factors(), &self.free).unwrap();
        result.values().iter().map(|number| number.value()).collect()
    }

    fn nanoseconds(&self, calls: u64, once: bool) -> u128 {
        let factors = self.factors();
        let plan = planned(&factors, &self.free).unwrap();
        let start = Instant::now();
        for _ in 0..calls {
            if once {
                black_box(evaluated(black_box(&factors), &plan, MULTIPLICATIONS_BUDGET).unwrap());
            } else {
                black_box(contract(black_box(&factors), black_box(&self.free)).unwrap());
            }
        }
        start.elapsed().as_nanos()
    }
}

fn array(ring: &Arc<Ring>, operand: &Value) -> Tensor<Number> {
    let numbers = |key: &str| operand[key].as_array().unwrap().iter().map(|number| number.as_u64().unwrap());
    let lengths: Vec<usize> = numbers("shape").map(|length| length as usize).collect();
    let entries: Vec<u64> = numbers("entries").collect();
    let place =
        |component: &[usize]| component.iter().zip(&lengths).fold(0, |place, (index, length)| place * length + index);
    Tensor::from_numbers(ring, &lengths, |component| Number::new(entries[place(component)])).unwrap()
}

fn labels(letters: &str) -> Vec<Label> {
    letters.bytes().map(Label::from).collect()
}

fn main() {
    let mut case = Case::default();
    for line in std::io::stdin().lock().lines() {
        let order: Value = serde_json::from_str(&line.unwrap()).unwrap();
        let answer = if let Some(calls) = order["calls"].as_u64() {
            json!({ "nanoseconds": case.nanoseconds(calls, order["planned"] == true) as u64 })
        } else {
            case = Case::new(&order);
            json!({ "modulus": FIRST, "values": case.values() })
        };
        println!("{answer}");
        std::io::stdout().flush().unwrap();
    }
}
