//! Damaged documents: what an editor, a broken disk or an unfinished thought makes of a text.
//!
//! A variant depends on its seed alone. Damage is done to bytes, and what is no longer UTF-8 is then replaced as
//! a lossy reader would, so that every variant is a text that a check may be given.

use indexwise_algebra::draws::Draws;

/// What breaks structure most: openings without an end, ends without an opening, odd characters.
const SNIPPETS: [&str; 36] = [
    "{",
    "}",
    "$",
    "$$",
    "\\[",
    "\\]",
    "\\(",
    "\\begin{align}",
    "\\end{align}",
    "\\begin{cases}",
    "\\end{equation}",
    "&",
    "\\\\",
    "%",
    "^",
    "_",
    "^{",
    "_{",
    "\\left(",
    "\\right)",
    "\\frac",
    "\\frac{",
    "\\verb|",
    "\\iffalse",
    "\\fi",
    "\\text{",
    "\\def\\u{\\u\\u}",
    "\\newcommand{\\v}[9]{#1",
    "\\u",
    "#1",
    "\0",
    "\u{202e}",
    "\r",
    "∂_μ",
    "```math",
    "conventions\n",
];

/// A longest stretch that one damage takes out, doubles or moves.
const STRETCH: u64 = 400;

/// The text with one to four pieces of damage.
pub fn damaged(text: &str, seed: u64) -> String {
    let mut draws = Draws::from_seed(seed);
    let mut bytes = text.as_bytes().to_vec();
    for _ in 0..1 + draws.below(4) {
        damage(&mut bytes, &mut draws);
    }
    String::from_utf8_lossy(&bytes).into_owned()
}

fn damage(bytes: &mut Vec<u8>, draws: &mut Draws) {
    let length = bytes.len() as u64;
    let at = draws.below(length + 1) as usize;
    let end = bytes.len().min(at + draws.below(STRETCH) as usize);
    match draws.below(8) {
        0 => bytes.truncate(at),
        1 => drop(bytes.drain(..at)),
        2 => drop(bytes.drain(at..end)),
        3 => {
            let stretch = bytes[at..end].to_vec();
            let to = draws.below(length + 1) as usize;
            bytes.splice(to..to, stretch);
        }
        4 => bytes.insert(at, draws.bits() as u8),
        5 => bytes[at..end].iter_mut().take(3).for_each(|byte| *byte = draws.bits() as u8),
        _ => {
            let snippet = SNIPPETS[draws.below(SNIPPETS.len() as u64) as usize];
            bytes.splice(at..at, snippet.bytes());
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const TEXT: &str = "The strain is $E_{ab} = \\nabla_{(a} u_{b)}$, μ above.\n";

    #[test]
    fn a_seed_fixes_the_damage() {
        assert!((0..200).all(|seed| damaged(TEXT, seed) == damaged(TEXT, seed)));
    }

    #[test]
    fn damage_is_varied_and_survives_empty_texts() {
        let mut variants: Vec<String> = (0..500).map(|seed| damaged(TEXT, seed)).collect();
        variants.sort();
        variants.dedup();
        assert!(variants.len() > 400, "{} variants differ", variants.len());
        assert!((0..200).map(|seed| damaged("", seed)).any(|variant| !variant.is_empty()));
    }
}
