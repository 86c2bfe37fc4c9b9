//! Generated LaTeX documents: prose mixed with balanced formulas in index notation, about 35 % of the bytes
//! mathematics, for benches, for linearity and as raw material of the damage tests.
//!
//! A formula is made, not picked: its free indices are drawn first, then every term of every side is a product
//! of kernels that carries exactly those, with its dummies in opposite pairs. So a generated document is silent
//! by construction, and what a check reports on it is a false alarm. All indices belong to one family with
//! levels; the same seed and size give the same text.

use std::fmt::Write;

use indexwise_algebra::draws::Draws;
use indexwise_grammar::hosts::{Host, scan};
use indexwise_grammar::macros::Macros;

/// Index letters of the surface of the shell; none of them is also a kernel below.
const LETTERS: [&str; 8] = ["a", "b", "c", "d", "e", "f", "g", "h"];

/// Kernels by the number of their slots, and whether their slots are staggered one by one. A kernel has one
/// number of slots.
const KERNELS: [&[&str]; 4] = [
    &["u", "v", "q", "\\xi", "\\hat t"],
    &["S", "E", "K", "\\bar N", "\\mathcal M", "P"],
    &["Q", "C", "\\tilde B"],
    &["W", "H", "\\mathcal D"],
];

/// Factors without indices.
const SCALARS: [&str; 9] =
    ["\\lambda", "2 \\mu", "\\half", "\\rho", "(1 - \\nu)", "\\sqrt{\\zeta}", "\\frac{Y}{1 - \\nu^2}", "3", "\\tau^3"];

/// Sentences that stand between formulas.
const SENTENCES: [&str; 14] = [
    "The sheet is thin, so that the membrane part of the strain is the larger one away from the rim.",
    "We measured the slope of the surface at forty stations and fitted the curvature by eye.",
    "A wave that enters the collar leaves it with its polarisation turned, which the flat sheet cannot do.",
    "Near the seam the thickness varies slowly, and we drop its second derivative.",
    "The reader who wants the details of the fit finds them in the notebook of the second week.",
    "Bending matters in a boundary layer whose width is the geometric mean of radius and thickness.",
    "As before, the load is dead: it keeps its direction while the surface turns.",
    "The same balance, written at the rim, gives the condition for the edge force.",
    "Rain spoiled the third series, and we repeated it with the sheet clamped along the seam.",
    "Both waves travel without dispersion as long as their length stays well above the thickness.",
    "This agrees with the frequencies that we heard, within the width of the resonance.",
    "The tension of the cable enters through the first term only.",
    "Damping was too weak to be seen in a single passage.",
    "It remains to say how the strain follows from the displacement of the middle surface.",
];

/// The mean number of bytes of mathematics for one of prose and commands, in percent of the whole.
const SHARE: usize = 35;

/// A LaTeX document of `bytes` bytes, give or take one paragraph.
pub fn document(seed: u64, bytes: usize) -> String {
    let mut writer =
        Writer { draws: Draws::from_seed(seed), text: String::with_capacity(bytes + 4096), mathematics: 0 };
    writer.text.push_str("\\documentclass{article}\n\\newcommand{\\half}{\\frac{1}{2}}\n\\begin{document}\n");
    for section in 1.. {
        let _ = writeln!(writer.text, "\n\\section{{Series {section} of the thin shell}}\n");
        for _ in 0..12 {
            if writer.text.len() >= bytes {
                writer.text.push_str("\\end{document}\n");
                return writer.text;
            }
            writer.paragraph();
        }
    }
    writer.text
}

/// The share of bytes that stand in the mathematics of a LaTeX text, in percent.
pub fn share_of_mathematics(text: &str) -> usize {
    let regions = scan(text, Host::Latex, &Macros::default()).regions;
    let bytes: usize = regions.iter().map(|region| region.span.len()).sum();
    bytes * 100 / text.len().max(1)
}

/// A letter at its level.
#[derive(Clone, Copy)]
struct Index {
    letter: &'static str,
    up: bool,
}

struct Writer {
    draws: Draws,
    text: String,
    /// Bytes of mathematics so far.
    mathematics: usize,
}

impl Writer {
    /// Some sentences and one formula set on its own, with formulas in the line until their share is reached.
    fn paragraph(&mut self) {
        for _ in 0..1 + self.draws.below(3) {
            let sentence = self.pick(&SENTENCES);
            self.text.push_str(sentence);
            self.text.push('\n');
        }
        while self.mathematics * 100 < SHARE * self.text.len() {
            if self.draws.below(3) == 0 { self.inline() } else { self.display() }
        }
        self.text.push('\n');
    }

    fn inline(&mut self) {
        let free = self.free_indices(2);
        let side = self.term(&free);
        self.text.push_str("Here ");
        self.formula(&format!("${side}$"));
        self.text.push_str(" is of the order of the load.\n");
    }

    fn display(&mut self) {
        let free = self.free_indices(3);
        let left = self.term(&free);
        let sides: Vec<String> = (0..1 + self.draws.below(3)).map(|_| self.sum(&free)).collect();
        let number = self.draws.below(1_000_000);
        let formula = match sides.as_slice() {
            [only] => format!("\\begin{{equation}}\\label{{eq:{number}}}\n  {left} = {only} .\n\\end{{equation}}\n"),
            rows => {
                let rows = rows.join(" \\\\\n  &= ");
                format!("\\begin{{align*}}\n  {left} &= {rows} ,\n\\end{{align*}}\n")
            }
        };
        self.formula(&formula);
    }

    fn formula(&mut self, formula: &str) {
        self.mathematics += formula.len();
        self.text.push_str(formula);
    }

    /// Up to `most` distinct free indices at drawn levels.
    fn free_indices(&mut self, most: u64) -> Vec<Index> {
        let count = self.draws.below(most + 1);
        (0..count as usize).map(|at| Index { letter: LETTERS[at], up: self.draws.below(2) == 0 }).collect()
    }

    /// One to four terms with the same free indices.
    fn sum(&mut self, free: &[Index]) -> String {
        let mut sum = self.term(free);
        for _ in 0..self.draws.below(4) {
            let sign = self.pick(&[" + ", " - "]);
            sum.push_str(sign);
            sum.push_str(&self.term(free));
        }
        sum
    }

    /// A product that carries the free indices and up to two dummies of its own.
    fn term(&mut self, free: &[Index]) -> String {
        let mut indices = free.to_vec();
        let dummies = self.draws.below(3) as usize + usize::from(free.is_empty());
        for letter in LETTERS.iter().skip(free.len()).take(dummies) {
            indices.push(Index { letter, up: true });
            indices.push(Index { letter, up: false });
        }
        self.shuffle(&mut indices);
        let mut factors = Vec::new();
        if self.draws.below(2) == 0 {
            factors.push(self.pick(&SCALARS).to_owned());
        }
        if indices.len() > 1 && self.draws.below(3) == 0 {
            let index = indices.pop();
            factors.extend(index.map(|index| scripted("\\nabla", &[index])));
        }
        while !indices.is_empty() {
            let slots = (1 + self.draws.below(KERNELS.len() as u64) as usize).min(indices.len());
            let own = indices.split_off(indices.len() - slots);
            factors.push(self.factor(&own));
        }
        factors.join(" ")
    }

    /// A kernel, a partial derivative or a sum in parentheses with these indices.
    fn factor(&mut self, indices: &[Index]) -> String {
        let kernels = KERNELS[indices.len() - 1];
        match (self.draws.below(6), indices) {
            (0, _) => {
                let (one, other) = (self.pick(kernels), self.pick(kernels));
                format!("( {} + {} )", scripted(one, indices), scripted(other, indices))
            }
            (1 | 2, [over, under]) if over.up && !under.up => {
                let kernel = self.pick(KERNELS[0]);
                format!("\\frac{{\\partial {kernel}^{}}}{{\\partial x^{}}}", over.letter, under.letter)
            }
            _ => scripted(self.pick(kernels), indices),
        }
    }

    fn shuffle(&mut self, indices: &mut [Index]) {
        for at in (1..indices.len()).rev() {
            indices.swap(at, self.draws.below(at as u64 + 1) as usize);
        }
    }

    fn pick<T: Copy>(&mut self, from: &[T]) -> T {
        from[self.draws.below(from.len() as u64) as usize]
    }
}

/// A kernel with its indices in order, staggered where the level changes.
fn scripted(kernel: &str, indices: &[Index]) -> String {
    let mut factor = kernel.to_owned();
    for (at, group) in indices.chunk_by(|one, other| one.up == other.up).enumerate() {
        let stagger = if at > 0 { "{}" } else { "" };
        let level = if group.iter().all(|index| index.up) { '^' } else { '_' };
        let letters: Vec<&str> = group.iter().map(|index| index.letter).collect();
        let _ = write!(factor, "{stagger}{level}{{{}}}", letters.join(" "));
    }
    factor
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_seed_fixes_the_document() {
        assert_eq!(document(5, 20_000), document(5, 20_000));
        assert_ne!(document(5, 20_000), document(6, 20_000));
    }

    #[test]
    fn documents_have_their_size_and_share() {
        for bytes in [10_000, 200_000] {
            let text = document(7, bytes);
            assert!((bytes..bytes + 4_000).contains(&text.len()), "{} bytes", text.len());
            let share = share_of_mathematics(&text);
            assert!((30..=40).contains(&share), "{share} % mathematics");
        }
    }
}
