//! The conventions language as it is promised: the README's table is the list of forms, every example is read in every
//! host, and a sentence that bears on findings does so.

#![allow(clippy::panic, clippy::unwrap_used)]

use std::fs;
use std::path::Path;
use std::sync::Arc;

use indexwise_checker::paper::{Cancel, Paper, Settings, SharedConventions, Source, check};
use indexwise_grammar::conventions::{FORMS, Form, read_sentence};
use indexwise_grammar::hosts::Host;
use indexwise_grammar::macros::Macros;
use indexwise_grammar::span::Span;

/// The rows of the README's section on conventions.
fn rows() -> Vec<String> {
    let readme = fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join("../README.md")).unwrap();
    let section = readme.split("\n## ").find(|section| section.starts_with("Conventions\n")).unwrap_or_default();
    section.lines().filter(|line| line.starts_with("| `")).map(str::to_owned).collect()
}

fn row(form: &Form) -> String {
    format!("| `{}` | {} | `{}` |", form.form, form.meaning, form.example)
}

#[test]
fn the_readme_has_the_forms_as_they_are() {
    let wanted: Vec<String> = FORMS.iter().map(row).collect();
    let found = rows();
    let missing: Vec<&String> = wanted.iter().filter(|row| !found.contains(row)).collect();
    assert!(missing.is_empty(), "the README lacks\n{missing:#?}");
    assert_eq!(found, wanted, "rows of no form, or out of order");
}

#[test]
fn every_example_is_read_in_every_host() {
    for form in FORMS {
        let note = form.example_note.unwrap_or(form.example);
        // A configuration file takes both spellings, as a note does.
        let spellings = [
            (Host::Latex, form.example),
            (Host::Markdown, form.example),
            (Host::Note, note),
            (Host::Note, form.example),
        ];
        for (host, example) in spellings {
            let read = read_sentence(example, 0, host, &Macros::default());
            assert!(read.is_ok(), "{host:?}: {example}: {read:?}");
        }
    }
}

/// A document that says these sentences, in the way of its host.
fn document(host: Host, sentences: &[&str], formula: &str) -> Source {
    let said = sentences.join("; ");
    let (path, text) = match host {
        Host::Latex => ("page.tex", format!("% indexwise: {said}\n$$ {formula} $$\n")),
        Host::Markdown => ("page.md", format!("<!-- indexwise: {said} -->\n\n$$ {formula} $$\n")),
        Host::Note => ("page.inote", format!("indexwise: {said}\n\n  {formula}\n")),
    };
    Source { path: path.to_owned(), text: Arc::from(text), host }
}

/// The rules that report something of the last document of a paper.
fn rules(documents: Vec<Source>, shared: Vec<SharedConventions>) -> Vec<&'static str> {
    let paper = Paper { documents, shared, ..Paper::default() };
    let analysis = check(&paper, &Settings::default(), &Cancel::default());
    let last = analysis.documents.into_iter().next_back();
    last.map(|one| one.findings.iter().map(|finding| finding.rule).collect()).unwrap_or_default()
}

/// Sentences that bear on findings: the sentence, as in the README; others that are said too; a formula; the finding
/// without the sentence and with it.
const EFFECTS: &[(&str, &str, &str, &str, &str)] = &[
    ("i j k l m n run from 1 to 3", "T_{ij} is a tensor", r"T_{i5} = q_i", "", "component-out-of-range"),
    (
        "a b c d range over 4 dimensions",
        r"\alpha \beta run from 1 to 2",
        r"h_{a\beta} = g_{a\beta}",
        "",
        "family-mismatch",
    ),
    (
        r"\mu \nu \rho \sigma run over t r \theta \phi",
        r"\alpha \beta run from 1 to 2",
        r"h_{\mu\beta} = g_{\mu\beta}",
        "",
        "family-mismatch",
    ),
    (
        "i j k are cartesian",
        "",
        r"q = a_{ij} b^{ij} + c_{ik} d^{ik} + e_{jk} f^{jk} + p_{ij} s^i{}_j",
        "dummy-levels",
        "",
    ),
    (
        r"i j k are the spatial part of \mu \nu",
        r"\mu \nu range over 4 dimensions; i j k range over 3 dimensions; T_{\mu\nu} is a tensor",
        r"p_\mu = T_{\mu i} v^i",
        "family-mismatch",
        "",
    ),
    ("A B are frame indices", "", r"q = V_{AB} W^A{}_B", "", "dummy-levels"),
    (r"A B are frame indices raised by \eta", "", r"q = V_{AB} W^A{}_B", "", "dummy-levels"),
    ("g_{ij} is the metric", "", r"q^i = T^{ij} S^{jk} v_k", "", "dummy-levels"),
    (r"\eta_{ab} is the metric, constant, signature - + + +", "", r"q^a = T^{ab} S^{bc} v_c", "", "dummy-levels"),
    ("x^i are the coordinates", "", r"q^{ijk} = x^{ijk}", "", "slot-count"),
    ("B is a label", "", r"q_j = T_{ijB} n_i", "free-index-mismatch", ""),
    (r"\Gamma^i_{jk} is the Christoffel symbol of g", "", r"q^i_{jkl} = \Gamma^i_{jkl}", "", "slot-count"),
    (
        r"D is the covariant derivative of \gamma",
        r"\gamma_{ij} is the metric",
        r"X_{ij}{}^k = D_i \partial_j V^k",
        "",
        "derivative-of-non-tensor",
    ),
    ("T_{ij} is symmetric", "", r"q_{ij} = p_{ij} + T_{[ij]}", "", "vanishing-bracket"),
    ("F_{ij} is antisymmetric", "", r"q_{ij} = p_{ij} + F_{(ij)}", "", "vanishing-bracket"),
    ("S_{ijk} is symmetric in i j", "", r"q_{ijk} = p_{ijk} + S_{[ij]k}", "", "vanishing-bracket"),
    ("S_{ijk} is antisymmetric in i j", "", r"q_{ijk} = p_{ijk} + S_{(ij)k}", "", "vanishing-bracket"),
    ("h_{ij} is traceless", "", r"q_{ijk} = h_{ijk}", "", "slot-count"),
    ("R_{ijkl} is the Riemann tensor of g", "", r"q_{ijk} = R_{ijk}", "", "slot-count"),
    ("R_{ij} is the Ricci tensor of g", "", r"q_{ij} = p_{ij} + R_{[ij]}", "", "vanishing-bracket"),
    ("G_{ij} is the Einstein tensor of g", "", r"q_{ij} = p_{ij} + G_{[ij]}", "", "vanishing-bracket"),
    ("C_{ijkl} is the Weyl tensor of g", "", r"q_{ijkl} = p_{ijkl} + C_{(ij)kl}", "", "vanishing-bracket"),
    (r"R_{jl} := \partial_k \Gamma^k_{jl} - \Gamma^k_{lm} \Gamma^m_{jk}", "", r"q_{jlm} = R_{jlm}", "", "slot-count"),
    ("T^{ij} is a tensor", "", r"q_{ijk} = T_{ijk}", "", "slot-count"),
    (r"\phi is a scalar", "", r"q_{ij} = \phi_{ij}", "", "slot-count"),
    (r"V^i \omega_j are vectors", "", r"q^{ij} = V^{ij}", "", "slot-count"),
    (
        "A B are matrices",
        "A_{ij} is symmetric; F^{ij} is antisymmetric",
        r"q = p + F^{ik} A_{ij} A_{kj}",
        "vanishing-contraction",
        "",
    ),
    (
        r"\gamma does not commute",
        r"\gamma^i is a vector; F_{ij} is antisymmetric",
        r"q = p + F_{ij} \gamma^i \gamma^j",
        "vanishing-contraction",
        "",
    ),
    ("skip this", "", r"q_i = \sigma_{ij} n_k", "free-index-mismatch", ""),
    ("allow dummy-levels here", "g_{ij} is the metric", r"q^i = T^{ij} S^{jk} v_k", "dummy-levels", ""),
    ("allow dummy-levels in this file", "g_{ij} is the metric", r"q^i = T^{ij} S^{jk} v_k", "dummy-levels", ""),
];

#[test]
fn a_sentence_bears_on_findings() {
    let expected = |rule: &'static str| if rule.is_empty() { Vec::new() } else { vec![rule] };
    let mut wrong = Vec::new();
    for (sentence, others, formula, without, with) in EFFECTS {
        assert!(FORMS.iter().any(|form| form.example == *sentence), "no example of the README: {sentence}");
        for host in [Host::Latex, Host::Markdown] {
            let others: Vec<&str> = if others.is_empty() { Vec::new() } else { vec![others] };
            let all: Vec<&str> = others.iter().copied().chain([*sentence]).collect();
            let found = (
                rules(vec![document(host, &others, formula)], vec![]),
                rules(vec![document(host, &all, formula)], vec![]),
            );
            if found != (expected(without), expected(with)) {
                wrong.push(format!("{host:?}: {sentence}: {found:?}"));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// Sentences of a configuration file.
fn configuration(sentence: &str) -> SharedConventions {
    let span = Span::new(0, sentence.len());
    SharedConventions {
        path: "indexwise.toml".to_owned(),
        text: Arc::from(sentence),
        sentences: vec![(sentence.to_owned(), span)],
    }
}

#[test]
fn the_nearer_scope_wins() {
    const FORMULA: &str = "q_j = T_{5j}";
    let [three, five] = ["i j k run from 1 to 3", "i j k run from 1 to 5"];
    let page = |sentences: &[&str]| document(Host::Latex, &[sentences, &["T_{ij} is a tensor"]].concat(), FORMULA);
    let found = |documents, shared: &[&str]| rules(documents, shared.iter().map(|text| configuration(text)).collect());
    let reported = ["component-out-of-range"];
    assert_eq!(found(vec![page(&[three])], &[]), reported);
    assert_eq!(found(vec![page(&[])], &[three]), reported, "of the project");
    assert_eq!(found(vec![page(&[three]), page(&[])], &[]), reported, "of the root");
    assert_eq!(found(vec![page(&[five])], &[three]), [""; 0], "the document over the project");
    assert_eq!(found(vec![page(&[five]), page(&[])], &[three]), [""; 0], "the root over the project");
    assert_eq!(found(vec![page(&[five]), page(&[three])], &[]), reported, "the document over its root");
    assert_eq!(found(vec![page(&[])], &[three, five]), [""; 0], "a nearer configuration over a farther one");
    assert_eq!(found(vec![page(&[three, five])], &[]), ["convention-clash", "component-out-of-range"], "one scope");
}

/// In a note the same sentences are spelt as its formulas are.
#[test]
fn a_note_says_them_in_its_own_spelling() {
    let text = "conventions\n  i j k run from 1 to 3\n  i j k are cartesian\n  T_ij is symmetric\n\n  q_i = p_i + epsilon_ijk T_jk\n";
    let source = |text: &str| Source { path: "page.inote".to_owned(), text: Arc::from(text), host: Host::Note };
    assert_eq!(rules(vec![source(text)], vec![]), ["vanishing-contraction"]);
    assert_eq!(rules(vec![source(&text.replace("  T_ij is symmetric\n", ""))], vec![]), [""; 0]);
}
