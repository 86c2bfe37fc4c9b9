//! Writes random contractions out, for comparison with arrays (`tests/references/written_out.py`).
//!
//! usage: written_out [SEED [COUNT]]
//!
//! One JSON object a line: `values` (what every letter runs over, in order), `kernels` (name, number of slots, and
//! lists of slots from 0 that are `symmetric` or `antisymmetric`), the `term` as it was asked for, the `sum` as it was
//! written out, both in LaTeX, how many `choices` of values and how many `terms` there are, and the terms that
//! `vanish`. The same seed gives the same output.

use std::io::Write as _;
use std::sync::Arc;

use indexwise_algebra::draws::Draws;
use indexwise_checker::editing::write_out::write_out;
use indexwise_checker::paper::{Cancel, Paper, Source, View};
use indexwise_grammar::hosts::Host;

/// Kernels with their symmetry as a sentence has it, and the slots that it speaks of.
const KERNELS: [(&str, usize, &str, &[usize]); 8] = [
    ("T", 2, "symmetric", &[0, 1]),
    ("F", 2, "antisymmetric", &[0, 1]),
    ("U", 2, "", &[]),
    ("S", 3, "symmetric", &[0, 1]),
    ("P", 3, "antisymmetric", &[1, 2]),
    ("Q", 3, "antisymmetric", &[0, 1, 2]),
    ("V", 1, "", &[]),
    ("W", 1, "", &[]),
];
const LETTERS: [&str; 4] = ["i", "j", "k", "l"];
const RANGES: [(&str, &[&str]); 3] = [
    ("run from 1 to 3", &["1", "2", "3"]),
    ("run from 0 to 3", &["0", "1", "2", "3"]),
    ("run over p q r", &["p", "q", "r"]),
];
const NUMBERS: [&str; 6] = ["", "", "2 ", "\\frac{1}{2} ", "\\frac{3}{4} ", "3 "];
/// Tries to fill the slots of a term with letters.
const TRIES: usize = 40;

fn main() -> std::io::Result<()> {
    let mut arguments = std::env::args().skip(1).map(|argument| argument.parse::<u64>().unwrap_or(1));
    let (seed, count) = (arguments.next().unwrap_or(1), arguments.next().unwrap_or(100));
    let mut draws = Draws::from_seed(seed);
    let mut output = std::io::stdout().lock();
    let mut written = 0;
    while written < count {
        let Some(line) = contraction(&mut draws) else { continue };
        writeln!(output, "{line}")?;
        written += 1;
    }
    Ok(())
}

fn number(draws: &mut Draws, bound: usize) -> usize {
    usize::try_from(draws.below(bound as u64)).unwrap_or_default()
}

fn pick<'a, T>(items: &'a [T], draws: &mut Draws) -> Option<&'a T> {
    items.get(number(draws, items.len()))
}

/// A term of kernels in which some letters stand twice and at most two once; now and then its last kernel stands in a
/// bracket with another of the same slots.
fn term(draws: &mut Draws) -> Option<String> {
    let kernels: Vec<_> = (0..2 + number(draws, 2)).filter_map(|_| pick(&KERNELS, draws)).collect();
    for _ in 0..TRIES {
        let fill = |slots: usize, draws: &mut Draws| -> String {
            (0..slots).filter_map(|_| pick(&LETTERS, draws).copied()).collect::<String>()
        };
        let scripts: Vec<String> = kernels.iter().map(|kernel| fill(kernel.1, draws)).collect();
        let all = scripts.concat();
        let count = |letter: &str| all.matches(letter).count();
        let counts: Vec<usize> = LETTERS.iter().map(|letter| count(letter)).collect();
        let fits = |count: usize| counts.iter().filter(|own| **own == count).count();
        if counts.iter().all(|count| *count < 3) && fits(2) > 0 && fits(1) < 3 {
            let mut out = format!("{}{}", if draws.below(3) == 0 { "- " } else { "" }, pick(&NUMBERS, draws)?);
            for (at, (kernel, script)) in kernels.iter().zip(&scripts).enumerate() {
                let twin = KERNELS.iter().find(|other| other.1 == kernel.1 && other.0 != kernel.0);
                let once = script.chars().all(|letter| script.matches(letter).count() == 1);
                match twin.filter(|_| at + 1 == kernels.len() && once && draws.below(4) == 0) {
                    Some(twin) => out.push_str(&format!("({}_{{{script}}} + {}_{{{script}}}) ", kernel.0, twin.0)),
                    None => out.push_str(&format!("{}_{{{script}}} ", kernel.0)),
                }
            }
            return Some(out);
        }
    }
    None
}

fn contraction(draws: &mut Draws) -> Option<String> {
    let term = term(draws)?;
    let (range, values) = pick(&RANGES, draws)?;
    let slots = |count: usize| LETTERS.get(..count).unwrap_or_default().concat();
    let sentence = |(name, count, symmetry, slots_of): &(&str, usize, &str, &[usize])| {
        let letters: Vec<&str> = slots_of.iter().filter_map(|at| LETTERS.get(*at).copied()).collect();
        let kernel = format!("{name}_{{{}}}", slots(*count));
        match *symmetry {
            "" => format!("{kernel} is a tensor"),
            _ => format!("{kernel} is {symmetry} in {}", letters.join(" ")),
        }
    };
    let mut sentences = vec![format!("i j k l {range}"), "i j k l are cartesian".to_owned()];
    sentences.extend(KERNELS.iter().map(sentence));
    let start = format!("<!-- indexwise: {} -->\n\n$$ ", sentences.join("; "));
    // On the first kernel, so that all sums of the term are meant.
    let at = start.len() + term.find(|sign: char| sign.is_ascii_uppercase()).filter(|_| !term.starts_with('('))?;
    let text: Arc<str> = format!("{start}{term} $$\n").into();
    let source = Source { path: "random".to_owned(), text, host: Host::Markdown };
    let paper = Paper { documents: vec![source], ..Paper::default() };
    let written = match write_out(&View::of(&paper, &Cancel::default()), 0, u32::try_from(at).ok()?) {
        Ok(written) => written,
        Err(refusal) => {
            return Some(format!("{{\"term\": {}, \"refused\": {}}}", quoted(&term), quoted(&refusal.to_string())));
        }
    };
    let kernels = KERNELS.iter().map(|(name, count, symmetry, slots)| {
        format!(
            "{{\"name\": {}, \"slots\": {count}, \"symmetry\": {}, \"in\": {slots:?}}}",
            quoted(name),
            quoted(symmetry)
        )
    });
    let list = |items: Vec<String>| items.join(", ");
    Some(format!(
        "{{\"values\": [{}], \"kernels\": [{}], \"term\": {}, \"letters\": [{}], \"sum\": {}, \"choices\": {}, \
         \"terms\": {}, \"collected\": {}, \"vanished\": [{}]}}",
        list(values.iter().map(|value| quoted(value)).collect()),
        list(kernels.collect()),
        quoted(&term),
        list(written.letters.iter().map(|letter| quoted(&letter.letter)).collect()),
        quoted(&written.sum.latex),
        written.choices,
        written.terms.len(),
        written.collected,
        list(written.vanished.iter().map(|one| quoted(&one.term.latex)).collect()),
    ))
}

/// A text as JSON has it; no control characters stand in it.
fn quoted(text: &str) -> String {
    format!("\"{}\"", text.replace('\\', "\\\\").replace('"', "\\\""))
}
