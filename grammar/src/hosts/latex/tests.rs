//! What the LaTeX host takes for mathematics, and first what it does not.
#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use super::*;
use crate::hosts::ReferenceKind;

fn formulas(text: &str) -> Vec<&str> {
    let scan = scan(text, &Macros::default());
    let mut end = 0;
    for region in &scan.regions {
        assert!(
            region.span.start >= end && region.span.holds(region.body),
            "regions are ordered and hold their bodies"
        );
        assert!(text.is_char_boundary(region.body.start as usize) && text.is_char_boundary(region.body.end as usize));
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
fn text_and_listings_are_not_mathematics() {
    silent("The shell costs 5\\$ or 6\\$, 20\\% off.");
    silent("% $u_i$ \\[ u_i \\]\n  % $v_i$");
    silent("\\begin{verbatim}$u_i$\\end{verbatim} \\begin{lstlisting}[x]\n$v_i$\n\\end{lstlisting}");
    silent("\\begin{comment}\n\\[ u_i \\]\n\\end{comment} \\begin{alltt}$x$\\end{alltt}");
    silent("\\begin{minted}{tex}$u_i$");
    silent("\\verb|$u_i$| \\verb*+$v$+ \\lstinline[language=C]!$w$! \\mintinline{tex}|$x$| \\lstinline{$y$}");
    silent("\\url{http://a.org/$u$b%20} and \\href{x$y$}{text} \\includegraphics[width=2cm]{a$b}");
    silent("\\iffalse $u_i$ \\ifx\\a\\b $v_i$ \\else $w$ \\fi $x$ \\fi");
    silent("\\begin{document}\\end{document} $u_i$");
}

#[test]
fn the_preamble_is_not_mathematics() {
    finds("\\documentclass{article}\n\\title{On $u_i$}\n\\begin{document}$v_i$\\end{document}", &["v_i"]);
    finds("\\title{On $u_i$}", &["u_i"]);
}

#[test]
fn definitions_are_not_mathematics() {
    silent("\\newcommand{\\a}{$u_i$} \\def\\b#1{\\[ #1 \\]} \\newenvironment{q}{$}{$}");
    // Not understood, passed over all the same.
    silent("\\NewDocumentCommand{\\a}{r()}{$u_i$} \\DeclareMathOperator");
}

#[test]
fn coordinates_of_pictures_are_not_mathematics() {
    let text =
        "\\begin{tikzpicture}\\draw ($(a)!0.5!(b)$) -- ( $ (c)+(1,0) $ ); \\node {$u_i$};\\end{tikzpicture} ($v$)";
    finds(text, &["u_i", "v"]);
}

#[test]
fn delimiters_of_every_kind() {
    finds("a $u_i$ b \\(v_i\\) c $$w_i$$ d \\[x_i\\] $a$$b$", &["u_i", "v_i", "w_i", "x_i", "a", "b"]);
    for name in "equation align flalign gather multline eqnarray math displaymath dmath equation* align*".split(' ') {
        finds(&format!("\\begin{{{name}}}\r\nu_i = v_i\r\n\\end{{{name}}} $w$"), &["u_i = v_i", "w"]);
    }
}

#[test]
fn arguments_of_environments_are_not_in_the_body() {
    finds("\\begin{alignat}{2} u &= v \\end{alignat}", &["u &= v"]);
    finds("\\begin{IEEEeqnarray}{rCl} u &= v \\end{IEEEeqnarray}", &["u &= v"]);
    finds("\\begin{empheq}[box=\\fbox]{align} u &= v \\end{empheq}", &["u &= v"]);
    finds("\\begin{align}[u, v] = 0 \\end{align}", &["[u, v] = 0"]);
    finds("\\begin{subequations}\\begin{align}u\\end{align}\\end{subequations}", &["u"]);
}

#[test]
fn settings_and_spans() {
    let text = "$a$ \\[b\\] \\begin{align}c\\end{align} \\begin{math}d\\end{math}";
    let scan = scan(text, &Macros::default());
    let found: Vec<_> = scan.regions.iter().map(|region| (region.span.of(text), region.setting)).collect();
    assert_eq!(
        found,
        [
            ("$a$", Setting::Inline),
            ("\\[b\\]", Setting::Display),
            ("\\begin{align}c\\end{align}", Setting::Rows),
            ("\\begin{math}d\\end{math}", Setting::Inline),
        ]
    );
}

#[test]
fn inner_mathematics_belongs_to_the_outer_body() {
    finds("\\[ u_i \\text{ for $i < 3$ and \\(j\\)} \\]", &["u_i \\text{ for $i < 3$ and \\(j\\)}"]);
    finds("$u \\mbox{ if $v$} w$ $x$", &["u \\mbox{ if $v$} w", "x"]);
    finds("\\begin{align} u \\parbox[t]{2cm}{with $v$} \\end{align}", &["u \\parbox[t]{2cm}{with $v$}"]);
    finds("\\begin{equation}\\begin{aligned}u\\end{aligned}\\end{equation}", &["\\begin{aligned}u\\end{aligned}"]);
    finds("$$ \\hbox{ $u$ } $$ $v$", &["\\hbox{ $u$ }", "v"]);
}

#[test]
fn arguments_of_text_commands_are_read() {
    finds("\\textbf{the $u_i$} \\footnote{with \\begin{align}v\\end{align}}", &["u_i", "v"]);
    finds("\\section{The metric $g$}\\cite[see $v$]{key} \\ensuremath{w}", &["g", "v", "w"]);
}

#[test]
fn escapes_and_comments_inside_a_formula() {
    finds("$a \\$ b$ \\[ x \\\\[2pt] y \\]", &["a \\$ b", "x \\\\[2pt] y"]);
    finds("\\begin{align}\nu % $v\n&= w\n\\end{align}", &["u % $v\n&= w"]);
}

#[test]
fn an_inline_formula_ends_with_its_paragraph() {
    finds("costs 5$ today\n\n$u_i$ and", &["u_i"]);
    finds("costs 5$ today\n \t\r\n$u_i$ and", &["u_i"]);
    finds("costs 5$ and\n\\begin{align}u\\end{align} $v$", &["u", "v"]);
    finds("costs 5$ and\n\\section{On $v$}", &["v"]);
    finds("an open \\( u\n\nand \\(v\\)", &["v"]);
    finds("$x \\text{if$ and\n\n$v$", &["x \\text{if", "v"]);
}

#[test]
fn a_display_half_typed_swallows_no_text() {
    finds("\\[ u_i = \n\ntext with $v$\n\n\\[ w \\]", &["u_i =", "v", "w"]);
    finds("\\begin{align} u_i\n\ntext $v$\n\\begin{align}w\\end{align}", &["u_i", "v", "w"]);
    finds("$$ u_i\n\nthe text goes on here\n$$ w $$", &["u_i", "w"]);
    finds("$$ u_i $ and $v$", &["u_i", "v"]);
    finds("\\begin{align} u_i", &["u_i"]);
    finds("\\[ u \\section{On $v$}", &["u", "v"]);
    finds("\\begin{itemize}\\item \\[ u_i\n\\end{itemize} $v$", &["u_i", "v"]);
}

#[test]
fn a_display_may_hold_a_blank_line() {
    finds("\\begin{align}\nu\n\n&= v\n\\end{align} $w$", &["u\n\n&= v", "w"]);
    finds("$$ u\n\n= v_i $$ $w$", &["u\n\n= v_i", "w"]);
}

#[test]
fn own_delimiters() {
    let be = "\\newcommand{\\be}{\\begin{equation}}\\def\\ee{\\end{equation}}\n";
    finds(&format!("{be}\\be u_i \\ee $v$"), &["u_i", "v"]);
    finds(&format!("{be}\\be u_i \\end{{equation}} $v$"), &["u_i", "v"]);
    finds("\\newcommand{\\be}{\\[}\\newcommand{\\ee}{\\]} \\be u \\ee v", &["u"]);
    finds("\\def\\dd{$$} \\dd u \\dd v $w$", &["u", "w"]);
    finds("\\let\\be\\equation\\let\\ee\\endequation \\be u \\ee v", &["u"]);
    finds("\\newcommand{\\bel}[1]{\\begin{align}\\label{#1}} \\bel{eq:a} u \\end{align} $v$", &["u", "v"]);
    // Not before they are defined.
    finds("\\be u \\newcommand{\\be}{\\[}\\be v \\]", &["v"]);
}

#[test]
fn own_environments() {
    finds("\\newenvironment{eq}{\\begin{equation}}{\\end{equation}}\\begin{eq}u_i\\end{eq} $v$", &["u_i", "v"]);
    finds("\\NewDocumentEnvironment{eq}{o}{\\[}{\\]}\\begin{eq}[x]u_i\\end{eq} $v$", &["u_i", "v"]);
    finds("\\NewEnviron{eq}{\\begin{align}\\BODY\\end{align}}\\begin{eq}u_i\\end{eq} $v$", &["u_i", "v"]);
    finds("\\newenvironment{claim}{\\textbf{Claim}}{}\\begin{claim}Let $u$\\end{claim}", &["u"]);
    silent("\\lstnewenvironment{code}{}{}\\begin{code}$u$\\end{code}");
    silent("\\DefineVerbatimEnvironment{code}{Verbatim}{}\\begin{code}$u$\\end{code}");
}

#[test]
fn own_macros_that_wrap_an_argument() {
    finds("\\newcommand{\\eqn}[1]{\\begin{equation}#1\\end{equation}}\\eqn{u_i} $v$", &["u_i", "v"]);
    finds("\\newcommand{\\eqn}[2]{\\begin{align}\\label{#1}#2\\end{align}}\\eqn{eq:a}{u_i}", &["u_i"]);
    finds("\\newcommand{\\m}[1]{$#1$}\\m{u_i}", &["u_i"]);
}

#[test]
fn macros_that_wrap_nothing() {
    silent("\\newcommand{\\vect}[1]{\\ensuremath{\\mathbf{#1}}} \\vect{u}");
    silent("\\newcommand{\\comp}[1]{$T_{#1}$} \\comp{ij}");
    silent("\\newcommand{\\ie}{$i$} \\ie{} text");
    silent("\\def\\a{\\b}\\def\\b{\\a} \\a text");
}

#[test]
fn inherited_macros_count() {
    let mut macros = Macros::default();
    for text in ["\\def\\be{\\begin{equation}}", "\\def\\ee{\\end{equation}}"] {
        macros.define(read_definition(text, 0, &macros).unwrap().meaning, 0, false);
    }
    let text = "\\be u_i \\ee $v$";
    let regions = scan(text, &macros).regions;
    assert_eq!(regions.iter().map(|region| region.body.of(text).trim()).collect::<Vec<_>>(), ["u_i", "v"]);
}

#[test]
fn rows_inside_an_own_opening() {
    let text = "\\def\\be{\\begin{equation}\\begin{split}}\\def\\ee{\\end{split}\\end{equation}}\\be u \\ee";
    let scan = scan(text, &Macros::default());
    assert_eq!(scan.regions[0].setting, Setting::Rows);
    assert_eq!(scan.regions[0].body.of(text), " u ");
}

#[test]
fn definitions_in_order_and_inside_formulas() {
    let text = "\\documentclass{a}\\newcommand{\\a}{x}\\begin{document}\\[ \\def\\b{y} \\b \\]\\let\\c\\a";
    let scan = scan(text, &Macros::default());
    let names: Vec<_> = scan.definitions.iter().map(|definition| definition.meaning.name.as_str()).collect();
    assert_eq!(names, ["a", "b", "c"]);
    assert_eq!(scan.definitions[2].meaning.body, "x");
    assert_eq!(scan.regions[0].holes, [scan.definitions[1].span]);
}

#[test]
fn references() {
    let text = "% !TEX root = ../main.tex\n\\documentclass[main.tex]{subfiles}\\usepackage[x]{a, b}\\begin{document}\
                \\input{parts/one} \\input two.tex \\include{three}\\subfile{four}\\import{dir}{five}\
                \\InputIfFileExists{six}{}{} \\input{\\folder/seven} % \\input{eight}\n";
    let scan = scan(text, &Macros::default());
    let found: Vec<_> = scan.references.iter().map(|found| (found.kind, found.path.as_str())).collect();
    use ReferenceKind::{Part, Root, Style};
    assert_eq!(
        found,
        [
            (Root, "../main.tex"),
            (Root, "main.tex"),
            (Style, "a"),
            (Style, "b"),
            (Part, "parts/one"),
            (Part, "two.tex"),
            (Part, "three"),
            (Part, "four"),
            (Part, "dir/five"),
            (Part, "six"),
        ]
    );
    assert!(scan.has_class);
    assert_eq!(scan.references[4].span.of(text), "\\input{parts/one}");
}

#[test]
fn directives_stand_in_comment_lines() {
    let text =
        "% indexwise: h is small\n%   i j run from 1 to 3\n\\begin{align}\n% indexwise: skip this\nu\\end{align}";
    let scan = scan(text, &Macros::default());
    let said: Vec<_> =
        scan.directives.iter().flat_map(|found| &found.sentences).map(|(said, _)| said.as_str()).collect();
    assert_eq!(said, ["h is small", "i j run from 1 to 3", "skip this"]);
}

#[test]
fn headings_and_what_stands_under_them() {
    let text = "$a$ \\chapter{Shells} $b$ \\section*{On $c$} $d$ \\subsubsection[s]{Waves}";
    let scan = scan(text, &Macros::default());
    assert_eq!(scan.headings.iter().map(|heading| heading.level).collect::<Vec<_>>(), [0, 1, 3]);
    assert_eq!(scan.headings[1].span.of(text), "\\section*{On $c$}");
    let under: Vec<_> = scan.regions.iter().map(|region| region.heading).collect();
    assert_eq!(under, [None, Some(0), Some(1), Some(1)]);
}

#[test]
fn every_prefix_is_scanned() {
    let text = "\\documentclass{a}\\newcommand{\\be}[1][x]{\\begin{equation}}\\begin{document}\\be[é] ∂_k \
                \\text{if $u$} \\end{equation}\\section{α}\\verb|x|\\iffalse\\fi$$é$$\\input{p}\\eqn{é}\
                % indexwise: é\n\\end{document}";
    for end in (0..=text.len()).filter(|end| text.is_char_boundary(*end)) {
        formulas(&text[..end]);
    }
}
