//! Damaged and hostile documents: a check must end and must not panic, whatever it is given.
//!
//! Variants come from fixed seeds, so that a failure names the document and the seed that made it. All checks run
//! on a thread with a stack of a fixed size, which unbounded recursion would overrun. No test looks at a clock.
//! With the variable `INDEXWISE_TESTS` set to `full` there are more variants and the hostile texts are larger.

#![allow(clippy::panic, clippy::unwrap_used)]

use std::panic::{AssertUnwindSafe, catch_unwind};
use std::thread;

use indexwise_checker::paper::{Cancel, Settings, StepMode};
use indexwise_grammar::hosts::Host;
use indexwise_tests::laws::{astray, places, reading};
use indexwise_tests::variants::damaged;
use indexwise_tests::{analyse_with, documents_below, generate};

/// What a check may use of the stack.
const STACK: usize = 16 << 20;

/// The largest piece of a document that is damaged; longer documents are damaged piece by piece.
const PIECE: usize = 6_000;

/// How many variants are tried in all.
fn variants() -> u64 {
    sized(3_000, 300_000)
}

/// Of so many variants one has its steps judged too.
const STEPS_JUDGED: u64 = 101;

fn sized<T>(short: T, full: T) -> T {
    if std::env::var("INDEXWISE_TESTS").is_ok_and(|mode| mode == "full") { full } else { short }
}

/// Reads and checks a text; what is misplaced in the answers.
fn misplaced(host: Host, text: &str) -> Vec<String> {
    misplaced_with(host, text, StepMode::default())
}

/// As `misplaced`, with these steps judged.
fn misplaced_with(host: Host, text: &str, steps: StepMode) -> Vec<String> {
    let mut misplaced = reading(host, text);
    let settings = Settings { steps, ..Settings::default() };
    let findings = analyse_with(host, text, &settings, &Cancel::default()).findings;
    misplaced.extend(places(text, &findings));
    misplaced.extend(astray(host, text, &findings));
    misplaced
}

/// Checks on a thread with the stated stack; the answer's places must fit the text.
fn survive(name: &str, host: Host, text: String) {
    let worker = thread::Builder::new().stack_size(STACK).spawn(move || misplaced(host, &text));
    let misplaced = worker.unwrap().join().unwrap_or_else(|_| panic!("{name}: the check panicked"));
    assert_eq!(misplaced.first(), None, "{name}");
}

/// Texts of a size that is checked quickly: name, host, text.
fn material() -> Vec<(String, Host, String)> {
    let mut material = Vec::new();
    for (path, host, text) in documents_below("fixtures").into_iter().chain(documents_below("documents")) {
        let name = path.file_name().unwrap_or_default().to_string_lossy().into_owned();
        let pieces = pieces(&text).into_iter().enumerate();
        material.extend(pieces.map(|(at, piece)| (format!("{name} piece {at}"), host, piece.to_owned())));
    }
    material.extend((0..4).map(|seed| (format!("generated {seed}"), Host::Latex, generate::document(seed, 3_000))));
    material
}

/// The text cut at line ends into pieces of about `PIECE` bytes.
fn pieces(text: &str) -> Vec<&str> {
    let mut pieces = Vec::new();
    let mut rest = text;
    while rest.len() > PIECE {
        let near = (0..=PIECE).rev().find(|at| rest.is_char_boundary(*at)).unwrap_or(rest.len());
        let cut = rest[near..].find('\n').map_or(rest.len(), |end| near + end + 1);
        let (piece, after) = rest.split_at(cut);
        pieces.push(piece);
        rest = after;
    }
    pieces.push(rest);
    pieces
}

#[test]
fn damaged_documents_are_survived() {
    let material = material();
    assert!(material.len() > 20, "the fixtures have not been found");
    let run = move || {
        for seed in 0..variants() {
            let (name, host, text) = &material[seed as usize % material.len()];
            let variant = damaged(text, seed);
            // Judging steps costs a hundred times as much as all else.
            let steps = if seed % STEPS_JUDGED == 0 { StepMode::default() } else { StepMode::Off };
            let misplaced = catch_unwind(AssertUnwindSafe(|| misplaced_with(*host, &variant, steps)))
                .unwrap_or_else(|_| panic!("{name}, seed {seed}: the check panicked on\n{variant}"));
            assert_eq!(misplaced.first(), None, "{name}, seed {seed}, in\n{variant}");
        }
    };
    thread::Builder::new().stack_size(STACK).spawn(run).unwrap().join().unwrap();
}

#[test]
fn every_prefix_of_a_short_document_is_survived() {
    let text = "\\newcommand{\\E}[2]{E_{#1 #2}}\n$ \\E{a}{b} = \\frac12 (\\nabla_a u_b + \\nabla_b u_a)$ % done\n\
                \\begin{align}\n S^{ab} &= C^{abcd} \\E{c}{d} \\\\\n &\\to \\left[ 0 \\right] \\end{align}\n";
    let run = move || {
        for end in (0..=text.len()).filter(|end| text.is_char_boundary(*end)) {
            for host in [Host::Latex, Host::Markdown, Host::Note] {
                assert_eq!(misplaced(host, &text[..end]), Vec::<String>::new(), "{}", &text[..end]);
            }
        }
    };
    thread::Builder::new().stack_size(STACK).spawn(run).unwrap().join().unwrap();
}

#[test]
fn macros_that_would_expand_without_end_are_survived() {
    let bomb: String = ('b'..='z').fold("\\def\\a{T_i T_i}\n".to_owned(), |text, name| {
        let before = char::from(name as u8 - 1);
        format!("{text}\\def\\{name}{{{}}}\n", format!("\\{before}").repeat(10))
    });
    let calls = |text: &str, call: &str| format!("{text}\n$ {call} = 0 $\n");
    for (name, text) in [
        ("bomb", calls(&bomb, "\\z")),
        ("itself", calls("\\def\\a{\\a}", "\\a")),
        ("itself twice", calls("\\def\\a{\\a x_i \\a}", "\\a")),
        ("each other", calls("\\newcommand{\\a}{\\b}\\newcommand{\\b}{\\a}", "\\a")),
        ("its argument", calls("\\newcommand{\\a}[1]{\\a{#1#1}}", "\\a{T_i}")),
        ("arguments", calls("\\newcommand{\\a}[1]{#1#1#1#1}", &("\\a{".repeat(60) + "x_i" + &"}".repeat(60)))),
        ("by another name", calls("\\let\\a\\b\\let\\b\\a", "\\a + \\b")),
        ("without an end", calls("\\newcommand{\\a}[2]{#1", "\\a{x}")),
        ("defining itself", calls("\\def\\a{\\def\\a{\\a\\a}\\a}", "\\a")),
    ] {
        survive(name, Host::Latex, text);
    }
}

#[test]
fn deep_nests_are_survived() {
    let depth = sized(20_000, 100_000);
    let nest = |open: &str, close: &str| format!("$ {}x_i{} = y_i $\n", open.repeat(depth), close.repeat(depth));
    let scripts = format!("$ T{}{} $\n", "_{a".repeat(depth), "}".repeat(depth));
    for (name, text) in [
        ("braces", nest("{", "}")),
        ("open braces", nest("{", "")),
        ("closing braces", nest("", "}")),
        ("parentheses", nest("(", ")")),
        ("growing parentheses", nest("\\left(", "\\right)")),
        ("fractions", nest("\\frac{1}{", "}")),
        ("roots", nest("\\sqrt{", "}")),
        ("hats", nest("\\hat{", "}")),
        ("scripts", scripts),
        ("scripts without braces", format!("$ {} $", "x_".repeat(depth))),
        ("words", nest("\\text{$", "$}")),
        ("environments", nest("\\begin{aligned}", "\\end{aligned}")),
        ("unknown macros", nest("\\wobble{", "}")),
        ("quotations", format!("{}$x_i$\n", "> ".repeat(depth))),
        ("lists", "- ".repeat(depth) + "$x_i = y_i$"),
        ("comments", "<!-- ".repeat(depth)),
    ] {
        survive(name, Host::Latex, text.clone());
        survive(name, Host::Markdown, text.clone());
        survive(name, Host::Note, format!("Notes\n\n  {text}"));
    }
}

#[test]
fn one_endless_line_is_survived() {
    let bytes = sized(2 << 20, 50 << 20);
    let prose = "The sheet rests on its rim and the wave runs along the seam, so that nothing else moves. ".repeat(10);
    let line = |unit: &str| unit.repeat(bytes / unit.len());
    survive("prose and formulas", Host::Latex, line(&format!("{prose} $\\nabla_a S^{{ab}} = f^b$ ")));
    survive("dollars", Host::Latex, "$".repeat(bytes / 50));
    survive("one formula", Host::Latex, format!("$ {} $", "T_{ab} v^b + ".repeat(bytes / 500)));
    survive("one script", Host::Latex, format!("$ T_{{{}}} $", "a b".repeat(bytes / 100)));
    survive("one note", Host::Note, format!("  {}", "T_ab v^b + ".repeat(bytes / 500)));
    survive("one page", Host::Markdown, line(&format!("{prose} $S_{{ab}} = S_{{ba}}$ ")));
}

#[test]
fn endless_repetitions_are_survived() {
    let times = sized(2_000, 40_000);
    let formula = |unit: &str| format!("$ {} $", unit.repeat(times));
    let rows = |unit: &str| format!("\\begin{{align}}{}\\end{{align}}", unit.repeat(times));
    let mut texts: Vec<String> = ["&", "\\\\ ", "a_i = ", "+", "\\boxed{a_i = b_i} "].map(rows).to_vec();
    texts.extend(["a_i,", "=", "_", "'", "|a", "(a", "\\frac ", "\\sqrt[", "\\foo["].map(formula));
    let openings = ["\\[ x ", "\\(", "\\begin{align} ", "\\verb", "`$", "<!--", "```\n", "\\iffalse ", "[x](", "> - "];
    let definitions = ["\\def\\a", "\\newcommand{\\a}[", "\\def\\a{x_i} $\\a$\n", "\\input{a} ", "\\section{a} $x_i$ "];
    texts.extend(openings.iter().chain(&definitions).map(|unit| unit.repeat(times)));
    for text in texts {
        let start: String = text.chars().take(20).collect();
        survive(&start, Host::Latex, text.clone());
        survive(&start, Host::Markdown, text.clone());
        survive(&start, Host::Note, format!("  {text}"));
    }
}

#[test]
fn odd_texts_are_survived() {
    for text in
        ["", "\n", "\r\n\r\n", "$", "$$", "\\", "%", "%~", "\\begin", "\\begin{", "\0", "\u{feff}", "`", "~~~", "  "]
    {
        for host in [Host::Latex, Host::Markdown, Host::Note] {
            survive(&format!("{text:?}"), host, text.to_owned());
        }
    }
}
