//! What sentences read as, told in one line each; where reading stops; what survives any soup of words.
#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use super::*;
use crate::hosts::{Host, scan};
use crate::macros::{Macros, Parameter, read_definition};
use crate::tree::dump;

const HOSTS: [Host; 3] = [Host::Latex, Host::Markdown, Host::Note];

fn names(names: &[Name]) -> String {
    names.iter().map(|name| name.text.as_str()).collect::<Vec<_>>().join(" ")
}

fn tensor(tensor: &Tensor) -> String {
    let slot = |slot: Slot| format!("{}{}", if slot.level == Level::Up { '^' } else { '_' }, slot.letter);
    std::iter::once(tensor.name().to_owned()).chain(tensor.slots().into_iter().map(slot)).collect()
}

fn tensors(all: &[Tensor]) -> String {
    all.iter().map(tensor).collect::<Vec<_>>().join(" ")
}

fn bound(bound: &Bound) -> String {
    match bound {
        Bound::Number(number) => number.to_string(),
        Bound::Letter(letter, less) => format!("{}-{less}", letter.text),
    }
}

fn of(metric: &Option<Name>) -> &str {
    metric.as_ref().map_or("?", |name| name.text.as_str())
}

/// A sentence in one line.
fn tell(sentence: &Sentence) -> String {
    match sentence {
        Sentence::Family { letters, range } => {
            let range = match range {
                Range::Between(from, to) => format!("{from}..{}", bound(to)),
                Range::Size(size) => format!("size {}", bound(size)),
                Range::Members(members) => format!("members {}", names(members)),
            };
            format!("family {}: {range}", names(letters))
        }
        Sentence::Dimension { letter, of } => format!("dimension {} of [{}]", letter.text, names(of)),
        Sentence::Cartesian(letters) => format!("cartesian {}", names(letters)),
        Sentence::Spatial { letters, of } => format!("spatial {} of {}", names(letters), names(of)),
        Sentence::Frame { letters, raised_by } => format!("frame {} by {}", names(letters), of(raised_by)),
        Sentence::Metric { tensor: metric, constant, signature } => {
            let signs: String = signature.iter().map(|plus| if *plus { '+' } else { '-' }).collect();
            format!("metric {}{} ({signs})", tensor(metric), if *constant { " constant" } else { "" })
        }
        Sentence::Raises { metric, kernels } => format!("{} raises {}", metric.text, names(kernels)),
        Sentence::Coordinates(coordinate) => format!("coordinates {}", tensor(coordinate)),
        Sentence::CoordinateNames(letters) => format!("coordinate names {}", names(letters)),
        Sentence::Labels(letters) => format!("labels {}", names(letters)),
        Sentence::Christoffel { tensor: symbol, of: metric } => {
            format!("christoffel {} of {}", tensor(symbol), of(metric))
        }
        Sentence::CovariantDerivative { kernel, of: metric } => format!("covariant {} of {}", kernel.text, of(metric)),
        Sentence::Symmetry { tensors: all, antisymmetric, slots } => {
            format!("{}symmetric {} in [{}]", if *antisymmetric { "anti" } else { "" }, tensors(all), names(slots))
        }
        Sentence::Traceless(all) => format!("traceless {}", tensors(all)),
        Sentence::Curvature { tensor: curvature, kind, of: metric } => {
            format!("{kind:?} {} of {}", tensor(curvature), of(metric))
        }
        Sentence::Kind { tensors: all, kind } => format!("{kind:?} {}", tensors(all)),
        Sentence::Definition(statement) => {
            let formula = crate::tree::Formula { statements: vec![(**statement).clone()], ..Default::default() };
            dump(&formula)
        }
        Sentence::Skip => "skip".to_owned(),
        Sentence::Allow { rule, here } => format!("allow {}{}", rule.text, if *here { " here" } else { "" }),
        Sentence::Check { using } => format!("check using [{}]", names(using)),
        Sentence::DerivationsAreChecked => "derivations".to_owned(),
    }
}

/// What the example of each form says, in the order of `FORMS`.
const EXAMPLES: &[&str] = &[
    "family i j k l m n: 1..3",
    "family p q: 0..n-1",
    "family a b c d: size 4",
    r"family \mu \nu \rho \sigma: members t r \theta \phi",
    "dimension n of []",
    "dimension D of [a b c]",
    "cartesian i j k",
    r"spatial i j k of \mu \nu",
    "frame A B by ?",
    r"frame A B by \eta",
    "metric g_i_j ()",
    r"metric \eta_a_b constant (-+++)",
    r"\tilde g raises \tilde A \tilde B",
    "coordinates x^i",
    r"coordinate names t r \theta \phi",
    "coordinate names r",
    "labels B",
    r"christoffel \Gamma^i_j_k of g",
    r"covariant D of \gamma",
    "symmetric T_i_j in []",
    "antisymmetric F_i_j in []",
    "symmetric S_i_j_k in [i j]",
    "antisymmetric S_i_j_k in [i j]",
    "traceless h_i_j",
    "Riemann R_i_j_k_l of g",
    "Ricci R_i_j of g",
    "Scalar R of g",
    "Einstein G_i_j of g",
    "Weyl C_i_j_k_l of g",
    r"R_{j l} Equal(:=) \partial_{k} \Gamma^{k}_{j l} - \Gamma^{k}_{l m} \Gamma^{m}_{j k}",
    "Tensor T^i^j",
    r"EpsilonSymbol \epsilon",
    r"Scalar \phi",
    r"Vector V^i \omega_j",
    "Constant m",
    "Small h",
    "Matrix A B",
    r"NonCommuting \gamma",
    r"Variation \delta",
    "ParameterDerivative dot",
    "derivations",
    "check using []",
    "check using []",
    "check using [eq:gamma eq:compat]",
    "skip",
    "allow dummy-levels here",
    "allow dummy-levels",
];

#[track_caller]
fn reads_in(host: Host, text: &str, macros: &Macros, expected: &str) {
    let read = read_sentence(text, 0, host, macros).unwrap_or_else(|error| panic!("{host:?} {text}: {error:?}"));
    // Which sign defines does not matter.
    assert_eq!(tell(&read).replace("\\coloneqq", ":="), expected, "{host:?} {text}");
}

/// In all hosts alike.
#[track_caller]
fn reads(text: &str, expected: &str) {
    HOSTS.iter().for_each(|host| reads_in(*host, text, &Macros::default(), expected));
}

#[track_caller]
fn reads_in_notes(text: &str, expected: &str) {
    reads_in(Host::Note, text, &Macros::default(), expected);
}

#[track_caller]
fn stops(text: &str, at: &str, reason: &str, nearest: Option<&str>) {
    for host in [Host::Latex, Host::Markdown] {
        let error = read_sentence(text, 0, host, &Macros::default()).expect_err(text);
        assert_eq!(error.span.of(text), text.trim(), "{text}");
        assert_eq!((error.at.of(text), error.reason.as_str()), (at, reason), "{text}");
        assert_eq!(error.nearest.map(|form| form.form), nearest, "{text}");
        if at.is_empty() {
            assert_eq!(error.at.end, error.span.end, "{text}");
        }
    }
}

#[test]
fn every_example_of_a_form_is_read_in_every_host() {
    assert_eq!(FORMS.len(), EXAMPLES.len());
    for (form, expected) in FORMS.iter().zip(EXAMPLES) {
        reads_in(Host::Latex, form.example, &Macros::default(), expected);
        reads_in(Host::Markdown, form.example, &Macros::default(), expected);
        reads_in_notes(form.example_note.unwrap_or(form.example), expected);
        // Whoever pastes LaTeX's spelling into a note is read too.
        reads_in_notes(form.example, expected);
    }
}

#[test]
fn a_form_is_nearest_to_its_example_that_goes_on_wrongly() {
    // Forms whose examples say no more than another form does.
    let alike = ["LETTERS run from NUMBER to LETTER", "LETTERS are the coordinates", "LETTER is a coordinate"];
    for form in FORMS.iter().filter(|form| !form.form.contains(":=")) {
        let text = format!("{} zzz", form.example);
        let nearest =
            read_sentence(&text, 0, Host::Latex, &Macros::default()).map_err(|error| error.nearest.unwrap().form);
        if !alike.contains(&form.form) {
            assert_eq!(nearest, Err(form.form), "{text}");
        }
    }
}

#[test]
fn directives() {
    reads("skip this", "skip");
    reads("Skip this.", "skip");
    reads("allow dummy-levels here.", "allow dummy-levels here");
    reads("allow dummy-levels in this file", "allow dummy-levels");
    reads("check this step by step.", "check using []");
    reads("check this using (eq:a) and (eq:b-c).", "check using [eq:a eq:b-c]");
    reads("Derivations are checked", "derivations");
}

#[test]
fn labels_and_coordinates_are_letters_or_words() {
    reads(r"\theta, r are coordinates", r"coordinate names \theta r");
    reads("B is a label", "labels B");
    reads("B D are labels", "labels B D");
    reads("a is a label", "labels a");
    reads("μ, nu are labels", r"labels \mu \nu");
    reads("in out TT are labels", "labels in out TT");
    reads("+ is a label", "labels +");
    reads_in(Host::Latex, r"\text{eff} is a label", &Macros::default(), "labels eff");
    reads_in(Host::Latex, r"\mathrm{TT} is a label", &Macros::default(), "labels TT");
    reads("x_1 x_2 are the coordinates", "coordinate names x_1 x_2");
}

#[test]
fn families() {
    reads("i, j and k range from 0 to 3.", "family i j k: 0..3");
    reads("i runs from 1 to n", "family i: 1..n-0");
    reads("a b range over n dimensions", "family a b: size n-0");
    reads("a b run over n - 1 dimensions", "family a b: size n-1");
    reads("$i, j$ run from $0$ to $n-1$", "family i j: 0..n-1");
    reads(r"\(i\), \(j\) run from 0 to n−1", "family i j: 0..n-1");
    reads(
        r"i' \mu' i_1 \dot\alpha \bar a run over t, x and y",
        r"family i' \mu' i_1 \dot \alpha \bar a: members t x y",
    );
    reads("μ ν run over t r θ φ", r"family \mu \nu: members t r \theta \varphi");
    reads_in_notes("mu' nu_1 run over t x", r"family \mu' \nu_1: members t x");
}

#[test]
fn tensors_are_read_as_in_formulas() {
    reads(r"\tilde g_{ij} is a metric", r"metric \tilde g_i_j ()");
    reads(r"$\bar{h}_{ij}$ is traceless", r"traceless \bar h_i_j");
    reads(r"R^i{}_{jkl} is the Riemann tensor", r"Riemann R^i_j_k_l of ?");
    reads(r"R^i {}_{j k l} is the Riemann tensor", r"Riemann R^i_j_k_l of ?");
    reads(r"R^{i}_{\ jkl} is the Weyl tensor of \bar g", r"Weyl R^i_j_k_l of \bar g");
    reads(r"\tensor{R}{^i_j_k_l} is the Riemann tensor of \tilde g", r"Riemann R^i_j_k_l of \tilde g");
    reads(r"\mathcal L is constant", r"Constant \mathcal L");
    reads_in(Host::Latex, r"\mathrm{Ric}_{ij} is the Ricci tensor of g_{ij}", &Macros::default(), "Ricci Ric_i_j of g");
    reads(r"\tilde g, \bar h and \hat k_{ij} are small", r"Small \tilde g \bar h \hat k_i_j");
    reads(r"h^{\rm TT}_{ij} is traceless", "traceless h_i_j");
    reads_in_notes("Riem_abcd is the Riemann tensor of g", "Riemann Riem_a_b_c_d of g");
    reads_in_notes("Gamma^i_jk are the Christoffel symbols", r"christoffel \Gamma^i_j_k of ?");
    reads_in_notes("R^{mu}_{nu rho sigma} is the Riemann tensor", r"Riemann R^\mu_\nu_\rho_\sigma of ?");
}

#[test]
fn metrics_and_what_they_make() {
    for signature in ["- + + +", "(-,+,+,+)", "-+++", "(- + + +)", "(−+++)", "-, +, +, +", "$(-,+,+,+)$"] {
        let text = format!(r"\eta_{{ab}} is the metric, constant, signature {signature}");
        reads(&text, r"metric \eta_a_b constant (-+++)");
    }
    reads("g_{ij} is the metric, signature +++ and constant", "metric g_i_j constant (+++)");
    reads("g_{ij} is a metric.", "metric g_i_j ()");
    reads(r"\nabla is the covariant derivative", r"covariant \nabla of ?");
    reads(r"\nabla_\mu is the covariant derivative of \tilde g", r"covariant \nabla of \tilde g");
    reads("A is a frame index raised by \\eta", r"frame A by \eta");
}

#[test]
fn symmetries_and_kinds() {
    reads("T_{ij} and F_{kl} are antisymmetric", "antisymmetric T_i_j F_k_l in []");
    reads("S_{ijk} is totally antisymmetric", "antisymmetric S_i_j_k in []");
    reads("S_{ijk} is totally antisymmetric in i, j and k.", "antisymmetric S_i_j_k in [i j k]");
    reads(r"\epsilon is a tensor", r"EpsilonTensor \epsilon");
    reads(r"\varepsilon is a tensor", r"EpsilonTensor \varepsilon");
    reads(r"\epsilon_{ijk} is a tensor", r"EpsilonTensor \epsilon_i_j_k");
    reads(r"\epsilon_{ijk} is a symbol", r"EpsilonSymbol \epsilon_i_j_k");
    reads(r"\gamma \sigma do not commute", r"NonCommuting \gamma \sigma");
    reads("m is a constant", "Constant m");
    reads("m k are constants", "Constant m k");
    reads("A is a matrix", "Matrix A");
    reads("prime is a derivative", "ParameterDerivative prime");
    reads(r"\dot is a derivative", "ParameterDerivative dot");
    reads(r"\xi is a vector", r"Vector \xi");
}

#[test]
fn definitions() {
    let gamma = r"\Gamma^{i}_{j k} Equal(:=) [1 / 2] g^{i l} \partial_{j} g_{l k}";
    reads(r"\Gamma^i_{jk} := \frac12 g^{il} \partial_j g_{lk}", gamma);
    reads(r"\Gamma^i_{jk}:=\frac12 g^{il}\partial_j g_{lk}.", gamma);
    reads(r"$\Gamma^i_{jk} \coloneqq \frac12 g^{il} \partial_j g_{lk}$", gamma);
    let form = Some("TENSOR := FORMULA");
    stops("R := ", "", "nothing follows the sign of the definition", form);
    stops(":= a_i", ":=", "a definition has one tensor on its left", form);
    stops("a_i b := c_i", "a_i b", "a definition has one tensor on its left", form);
    stops("a := b = c", "=", "a definition has one relation", form);
    stops("a := b, c", "c", "a definition is one statement", form);
    stops("a := \\Riem", "\\Riem", "`\\Riem` is not defined", form);
}

#[test]
fn the_author_s_macros_are_known() {
    let mut macros = Macros::default();
    for source in
        [r"\newcommand{\Riem}{R}", r"\newcommand{\conn}[1]{\Gamma^{#1}}", r"\newcommand{\tens}[1]{\mathbf{#1}}"]
    {
        macros.define(read_definition(source, 0, &Macros::default()).unwrap().meaning, 0, false);
    }
    assert!(macros.at("conn", 0).unwrap().parameters.contains(&Parameter::Mandatory));
    reads_in(Host::Latex, r"\Riem_{abcd} is the Riemann tensor of g", &macros, "Riemann R_a_b_c_d of g");
    reads_in(Host::Latex, r"\conn i_{jk} is the Christoffel symbol", &macros, r"christoffel \Gamma^i_j_k of ?");
    reads_in(Host::Latex, r"\tens v is constant", &macros, r"Constant \mathbf v");
    let unknown = "`\\Riem_{abcd}` holds a command that is not defined";
    stops(r"\Riem_{abcd} is symmetric", r"\Riem_{abcd}", unknown, Some("TENSOR is symmetric"));
}

#[test]
fn places_count_from_the_document_s_start() {
    let document = "% indexwise: \\tilde g_{ij}, T_{kl} are symmetric";
    let base = 13;
    let read = read_sentence(&document[base..], base, Host::Latex, &Macros::default()).unwrap();
    let Sentence::Symmetry { tensors, .. } = read else { panic!("{read:?}") };
    assert_eq!(tensors[0].span.of(document), "\\tilde g_{ij}");
    assert_eq!(tensors[1].slots()[1].span.of(document), "l");
    assert_eq!(tensors[1].factor.span.of(document), "T_{kl}");
    let error = read_sentence("  B is a lable ", 100, Host::Latex, &Macros::default()).unwrap_err();
    assert_eq!((error.span, error.at), (Span::new(102, 114), Span::new(109, 114)));
    let read = read_sentence("check this using ( eq:a )", 7, Host::Latex, &Macros::default()).unwrap();
    let Sentence::Check { using } = read else { panic!("{read:?}") };
    assert_eq!(using[0].span, Span::new(26, 30));
}

#[test]
fn reading_stops_at_the_furthest_word() {
    stops("B is a lable", "lable", "`lable` is not a kind of thing", Some("LETTER is a label"));
    stops("i j run from x to 3", "x", "expected a number after `from`", Some("LETTERS run from NUMBER to NUMBER"));
    stops(
        "i j run from 1 to",
        "",
        "expected a letter or a number after `to`",
        Some("LETTERS run from NUMBER to NUMBER"),
    );
    stops(
        "i j run form 1 to 3",
        "form",
        "expected `from` or `over` after `run`",
        Some("LETTERS run from NUMBER to NUMBER"),
    );
    stops("i j", "", "expected `is`, `are`, `run` or another verb after `j`", None);
    stops("B a label", "label", "expected a verb before `label`", Some("LETTER is a label"));
    stops(
        "is a label",
        "is",
        "a sentence begins with a letter, a tensor or a directive, not with `is`",
        Some("LETTER is a label"),
    );
}

#[test]
fn what_fits_no_form_is_not_read() {
    stops("", "", "the sentence is empty", None);
    stops(" . ", "", "the sentence is empty", None);
    stops("skip that", "that", "expected `this` after `skip`", Some("skip this"));
    stops("skip these", "these", "expected `this` after `skip`", Some("skip this"));
    stops("allow dummy-levels", "", "expected `here` or `in` after `dummy-levels`", Some("allow RULE here"));
    stops("allow one two here", "two", "expected `here` or `in` after `one`", Some("allow RULE here"));
    stops("the weather is fine", "fine", "`fine` is not a kind of thing", None);
}

#[test]
fn names_must_fit_what_is_said_of_them() {
    let run = Some("LETTERS run from NUMBER to NUMBER");
    stops("ij k run from 1 to 3", "ij", "`ij` is several letters in one word; blanks part them", run);
    stops("i T_{ij} run from 1 to 3", "T_{ij}", "`T_{ij}` is not a single letter", run);
    stops("i j run from 3 to 1", "i j", "a range from 3 to 1 has no members", run);
    stops("i j run over s t s", "s", "`s` is named twice", Some("LETTERS run over LETTERS"));
    stops(
        "i j are the spatial part of a j",
        "j",
        "`j` cannot be a part of itself",
        Some("LETTERS are the spatial part of LETTERS"),
    );
    let metric = Some("TENSOR is the metric");
    stops("g is the metric", "g", "a metric has two indices, but `g` has no indices", metric);
    stops("g_{ij} h_{ij} are the metric", "h_{ij}", "this can be said of one thing only", metric);
    stops(
        "R_{ij} is the Riemann tensor",
        "R_{ij}",
        "the Riemann tensor has four indices, but `R_{ij}` has two indices",
        Some("TENSOR is the Riemann tensor of KERNEL"),
    );
    let symmetric = Some("TENSOR is symmetric");
    stops("T is symmetric", "T", "a symmetry exchanges two indices or more, but `T` has no index letters", symmetric);
    stops(
        "T_{ij} v^i are symmetric",
        "v^i",
        "a symmetry exchanges two indices or more, but `v^i` has one index",
        symmetric,
    );
    stops("S_{ijk} is symmetric in i m", "m", "`m` is no index of `S`", Some("TENSOR is symmetric in LETTERS"));
    stops(
        r"\nabla is a derivative",
        r"\nabla",
        r"only `dot` and `prime` are derivatives, not `\nabla`",
        Some("MARK is a derivative"),
    );
    stops(
        r"\epsilon T_{ij} are tensors",
        r"\epsilon",
        "the epsilon needs a sentence of its own",
        Some("TENSOR is a tensor"),
    );
    stops(
        "T_{ij is symmetric",
        "T_{ij is symmetric",
        "`T_{ij is symmetric` has a brace without its partner",
        Some("TENSOR is symmetric"),
    );
}

#[test]
fn in_a_note_a_word_of_the_language_is_no_kernel() {
    let text = "Gamma^i_jk is the Christoffel symbol of the metric g";
    let error = read_sentence(text, 0, Host::Note, &Macros::default()).unwrap_err();
    assert_eq!((error.at.of(text), error.reason.as_str()), ("the", "expected a kernel after `of`"));
    reads_in_notes("gt raises At and Bt", "gt raises At Bt");
}

#[test]
fn a_misspelt_sentence_is_near_to_its_form() {
    let nearest = |text| read_sentence(text, 0, Host::Note, &Macros::default()).unwrap_err().nearest.map(|f| f.form);
    assert_eq!(nearest("T_ij is symetric"), Some("TENSOR is symmetric"));
    assert_eq!(nearest("T_ij is anti-symmetric"), Some("TENSOR is antisymmetric"));
    assert_eq!(nearest("Gamma^i_jk is the Cristoffel symbol of g"), Some("TENSOR is the Christoffel symbol of KERNEL"));
    assert_eq!(nearest("A B are matricies"), Some("KERNELS are matrices"));
    assert_eq!(nearest("D is the covarient derivative of g"), Some("KERNEL is the covariant derivative of KERNEL"));
    assert_eq!(nearest("the metric is g_ij"), Some("TENSOR is the metric"));
    assert_eq!(nearest("the shell is thin"), None);
}

#[test]
fn sentences_reach_the_reader_from_every_host() {
    let latex = "\\section{Shell}\n% indexwise: i j run from 1 to 3\n%   g_{ij} is the metric; h is small\n$a$\n";
    let markdown = "# Shell\n\n<!-- indexwise: skip this; h is small -->\n\n```indexwise\ng_{ij} is the metric\n```\n";
    let note = "Shell\n\nconventions\n  i j run from 1 to 3\n  g_ij is the metric; h is small\n";
    let told = |text: &str, host| {
        let directives = scan(text, host, &Macros::default()).directives;
        let sentences = directives.iter().flat_map(|found| &found.sentences);
        let read =
            read_sentences(sentences.map(|(said, at)| (said.as_str(), at.start as usize)), host, &Macros::default());
        read.into_iter().map(|sentence| tell(&sentence.unwrap())).collect::<Vec<_>>()
    };
    assert_eq!(told(latex, Host::Latex), ["family i j: 1..3", "metric g_i_j ()", "Small h"]);
    assert_eq!(told(markdown, Host::Markdown), ["skip", "Small h", "metric g_i_j ()"]);
    assert_eq!(told(note, Host::Note), ["family i j: 1..3", "metric g_i_j ()", "Small h"]);
}

/// Words of the forms and what confuses them.
fn soup() -> Vec<&'static str> {
    let words = FORMS.iter().flat_map(|form| form.example.split(' ').chain(form.example_note.unwrap_or("").split(' ')));
    let odd =
        "$ \\( { } ( ) [ ] _ ^ , ; . - + \\ \\tilde \\conn \\ \\, := = ~ é 𝔸 \u{2212} 1 99999999999 % & ' \" \0 and";
    words.chain(odd.split(' ')).collect()
}

#[test]
fn any_soup_of_words_is_survived() {
    let words = soup();
    let mut seed = 7_u64;
    let mut next = |bound: usize| {
        seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (seed >> 33) as usize % bound
    };
    let mut read = 0;
    for round in 0..1000 {
        let mut text = "ж ".to_owned();
        let base = text.len();
        if round % 2 == 0 {
            let example = FORMS[next(FORMS.len())].example;
            let cut = (0..=next(example.len() + 1)).rev().find(|at| example.is_char_boundary(*at)).unwrap();
            text.push_str(&example[..cut]);
        }
        for _ in 0..next(12).saturating_sub(4) {
            text.push_str([" ", "", " ", ", "][next(4)]);
            text.push_str(words[next(words.len())]);
        }
        for host in HOSTS {
            match read_sentence(&text[base..], base, host, &Macros::default()) {
                Ok(sentence) => {
                    read += 1;
                    tell(&sentence);
                }
                Err(error) => {
                    let whole = Span::new(base, text.len());
                    assert!(whole.holds(error.span) && error.span.holds(error.at), "{host:?} {text:?} {error:?}");
                    assert!(text.get(error.at.range()).is_some() && text.get(error.span.range()).is_some(), "{text:?}");
                    assert!(!error.reason.is_empty() && !error.reason.contains("something else"), "{text:?} {error:?}");
                }
            }
        }
    }
    assert!(read > 50, "{read}");
}

#[test]
fn long_sentences_end_in_the_budget() {
    let reason = "the sentence is longer than the budget of 400 words";
    for word in ["i ", "\\tilde ", "(", "$", "i, ", "- ", "T_{ij} ", "{} ", "\\"] {
        let text = word.repeat(100_000) + "run from 1 to 3";
        for host in HOSTS {
            let error = read_sentence(&text, 0, host, &Macros::default());
            let error = error.map_err(|error| error.reason);
            if ["i ", "i, ", "- ", "T_{ij} "].contains(&word) {
                assert_eq!(error, Err(reason.to_owned()));
            }
        }
    }
    let long = format!("R := {}", "a_i b^i + ".repeat(100_000));
    let error = read_sentence(&long, 0, Host::Latex, &Macros::default()).unwrap_err();
    assert_eq!(error.reason, "the formula is longer than the budget");
}
