//! What the Markdown host takes for mathematics, and first what it does not.
#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use super::*;

fn formulas(text: &str) -> Vec<&str> {
    let scan = scan(text, &Macros::default());
    let mut end = 0;
    for region in &scan.regions {
        assert!(
            region.span.start >= end && region.span.holds(region.body),
            "regions are ordered and hold their bodies"
        );
        end = region.span.end;
    }
    scan.regions.iter().map(|region| region.body.of(text).trim()).collect()
}

#[track_caller]
fn finds(text: &str, expected: &[&str]) {
    assert_eq!(formulas(text), expected, "{text}");
}

#[track_caller]
fn silent(text: &str) {
    finds(text, &[]);
}

#[test]
fn money_is_not_mathematics() {
    silent("The clamp costs 5 $ or 6 $, the sheet $20 and $30.");
    silent("between $5 and $10, or \\$u_i\\$");
    silent("an open $u_i\n\nand a closing$ one");
}

#[test]
fn code_is_not_mathematics() {
    silent("`$u_i$` and ``$v_i$``");
    silent("```\n$u_i$\n$$v$$\n```\n");
    silent("~~~ tex\n\\begin{align}u\\end{align}\n~~~\n");
    silent("text\n\n    $u_i$ in indented code\n");
    silent("---\ntitle: On $u_i$\n---\n");
    silent("<!-- $u_i$ --> <code>$v$</code>\n\n<script>\nlet a = \"$x$\";\n</script>\n");
    finds("costs $5 `code` more$ and $v$", &["v"]);
}

#[test]
fn escaped_brackets_are_not_mathematics() {
    silent("see \\[1\\] and \\(below\\)");
}

#[test]
fn a_formula_in_the_line_stays_in_its_block() {
    silent("- a $u\n- b$\n");
    silent("| a $u | b$ |\n|---|---|\n| c | d |\n");
    finds("| $u_i$ | b |\n|---|---|\n| c | $v$ |\n", &["u_i", "v"]);
}

#[test]
fn delimiters_of_every_kind() {
    finds("a $u_i$, \\(v_i\\), $$w_i$$\n\\[x_i\\]", &["u_i", "v_i", "w_i", "x_i"]);
    finds("# On $g$\n\n* $a_i *b* c_i$ and $d_1*e_2$*f*\n", &["g", "a_i *b* c_i", "d_1*e_2"]);
    finds("\\begin{align*}\nu &= v \\\\\n&= w\n\\end{align*}\ntext $x$", &["u &= v \\\\\n&= w", "x"]);
    finds("$`u_i`$ and $v$", &["u_i", "v"]);
}

#[test]
fn fenced_mathematics() {
    let text = "```math\nu_i\n= v_i\n```\n";
    finds(text, &["u_i\n= v_i"]);
    assert_eq!(scan(text, &Macros::default()).regions[0].setting, Setting::Display);
}

#[test]
fn a_display_wins_over_what_its_lines_look_like() {
    finds("$$\nu_i\n+ v_i\n- w_i\n> 0\n# a\n$$\n", &["u_i\n+ v_i\n- w_i\n> 0\n# a"]);
    assert!(scan("$$\nu_i\n# a\n$$\n", &Macros::default()).headings.is_empty());
    finds("\\begin{align}\nu\n\n    &= v\n\\end{align}\n$w$", &["u\n\n    &= v", "w"]);
}

#[test]
fn a_display_half_typed_swallows_no_text() {
    finds("$$ u_i\n\ntext with $v$ and\n\n$$ w $$", &["v", "w"]);
    finds("$$ u_i\n```\n$$\n```\n$v$", &["v"]);
    finds("\\begin{align} u\n\ntext $v$ \\begin{align}w\\end{align}", &["u", "v", "w"]);
}

#[test]
fn quotation_marks_are_holes() {
    let text = "> $$\n> u_i\n> = v_i\n> $$\n";
    let scan = scan(text, &Macros::default());
    let region = &scan.regions[0];
    assert_eq!(region.holes.iter().map(|hole| hole.of(text)).collect::<Vec<_>>(), [">", ">", ">"]);
    let inner = "a\n> ```math\n> u\n> v\n> ```\n";
    let fenced = &super::scan(inner, &Macros::default()).regions[0];
    assert_eq!((fenced.body.of(inner), fenced.holes.len()), ("u\n> v\n", 1));
}

#[test]
fn definitions_are_collected_and_no_formulas() {
    let text =
        "$$\n\\newcommand{\\e}{\\varepsilon}\n\\newcommand{\\s}[1]{\\sigma_{#1}}\n$$\n\nWith \\def\\a{x} and $\\e$";
    finds(text, &["\\e"]);
    let definitions = scan(text, &Macros::default()).definitions;
    let names: Vec<_> = definitions.iter().map(|definition| definition.meaning.name.as_str()).collect();
    assert_eq!(names, ["e", "s", "a"]);
    let mixed = "$$ \\def\\b{y} u_i $$";
    assert_eq!(scan(mixed, &Macros::default()).regions[0].holes.len(), 1);
}

#[test]
fn directives_in_comments_and_fences() {
    let text = "<!-- indexwise: h is small;\n g_{ij} is the metric -->\n\n\
                ```indexwise\ni j run from 1 to 3\n\nskip this\n```\n";
    let scan = scan(text, &Macros::default());
    let said: Vec<Vec<_>> =
        scan.directives.iter().map(|found| found.sentences.iter().map(|(_, span)| span.of(text)).collect()).collect();
    assert_eq!(said, [["h is small", "g_{ij} is the metric"], ["i j run from 1 to 3", "skip this"]]);
}

#[test]
fn headings_and_what_stands_under_them() {
    let text = "$a$\n\n# Shells\n\n$b$\n\nOn $c$\n------\n\n```math\nd\n```\n\n### Waves\n";
    let scan = scan(text, &Macros::default());
    assert_eq!(scan.headings.iter().map(|heading| heading.level).collect::<Vec<_>>(), [1, 2, 3]);
    assert_eq!(scan.headings[0].span.of(text), "# Shells");
    let under: Vec<_> = scan.regions.iter().map(|region| region.heading).collect();
    assert_eq!(under, [None, Some(0), Some(1), Some(1)]);
}

#[test]
fn every_prefix_is_scanned() {
    let text = "# é\n> $$\n> ∂_k\n> $$\n\n<!-- indexwise: é -->\n`é` $é$ \\(é_i\\) <code>é</code>\n```math\né\n```\n";
    for end in (0..=text.len()).filter(|end| text.is_char_boundary(*end)) {
        formulas(&text[..end]);
    }
}
