//! How fast documents are read and checked, on one core. Run with `cargo bench -p indexwise-tests`.
//!
//! `lexer`, `hosts` and `reading` give the floor on which the check stands, and `growth` compares a document with
//! one ten times as long: the throughput of both should be the same, for all work is meant to be linear.

use divan::Bencher;
use divan::counter::BytesCount;
use indexwise_grammar::hosts::{Host, scan};
use indexwise_grammar::macros::Macros;
use indexwise_grammar::{read, tokens};
use indexwise_tests::{analyse, generate};

/// Bytes of the document that most benches use.
const SIZE: usize = 1_000_000;

/// The seed of all documents.
const SEED: u64 = 1;

fn main() {
    divan::main();
}

fn run<T>(bencher: Bencher, bytes: usize, work: impl Fn(&str) -> T + Sync) {
    let text = generate::document(SEED, bytes);
    bencher.counter(BytesCount::of_str(&text)).bench(|| work(divan::black_box(&text)));
}

#[divan::bench(sample_count = 10)]
fn check(bencher: Bencher) {
    run(bencher, SIZE, |text| analyse(Host::Latex, text));
}

#[divan::bench]
fn lexer(bencher: Bencher) {
    run(bencher, SIZE, tokens::count);
}

#[divan::bench]
fn hosts(bencher: Bencher) {
    run(bencher, SIZE, |text| scan(text, Host::Latex, &Macros::default()));
}

#[divan::bench(sample_count = 10)]
fn reading(bencher: Bencher) {
    run(bencher, SIZE, |text| read(text, Host::Latex, &Macros::default()));
}

#[divan::bench(args = [SIZE / 5, SIZE * 2], sample_count = 5)]
fn growth(bencher: Bencher, bytes: usize) {
    run(bencher, bytes, |text| analyse(Host::Latex, text));
}
