//! Contractions written out: the sums by hand, the places that ask for them, and what is refused.
//!
//! The cursor is the sign `‸`, right before the character that it stands on. That the sums are right in their values is
//! tested against arrays too (`tests/references/written_out.py`).

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use std::sync::Arc;

use indexwise_grammar::hosts::Host;

use super::*;
use crate::paper::{Cancel, Paper, Source};

const CURSOR: char = '‸';

fn asked(text: &str, host: Host) -> Result<WrittenOut, Refusal> {
    let offset = text.find(CURSOR).expect("a cursor");
    let text: Arc<str> = text.replace(CURSOR, "").into();
    let paper = Paper { documents: vec![Source { path: "sheet".into(), text, host }], ..Paper::default() };
    write_out(&View::of(&paper, &Cancel::default()), 0, offset as u32)
}

#[track_caller]
fn answer(text: &str, host: Host) -> WrittenOut {
    asked(text, host).unwrap_or_else(|refusal| panic!("{text}: {refusal}"))
}

/// The sum in LaTeX for a Markdown text with a cursor.
#[track_caller]
fn gives(text: &str, want: &str) -> WrittenOut {
    let answer = answer(text, Host::Markdown);
    assert_eq!(answer.sum.latex, want, "{text}");
    assert!(answer.collected, "{text}");
    answer
}

#[track_caller]
fn refuses(text: &str, want: &str) {
    let answer = asked(text, Host::Markdown).map(|answer| answer.sum.latex);
    assert_eq!(answer.map_err(|refusal| refusal.to_string()), Err(want.to_owned()), "{text}");
}

/// What is left out, and why.
fn left_out(answer: &WrittenOut) -> Vec<String> {
    let because = |because: &Because| match because {
        Because::Factor(forms) => forms.latex.clone(),
        Because::Symmetry => "symmetry".to_owned(),
        Because::Cancels => "cancels".to_owned(),
    };
    answer.vanished.iter().map(|one| format!("{} ({})", one.term.latex, because(&one.because))).collect()
}

fn declared(text: &str) -> String {
    let sentences = "i j k l run from 1 to 3; T_{ij} is symmetric; F_{ij} is antisymmetric; U_{ij} is a tensor";
    format!("<!-- indexwise: {sentences} -->\n\n{text}")
}

#[test]
fn the_trace_of_a_connection_by_custom() {
    let answer = gives("$‸\\Gamma^i_{ik} = \\partial_k w$", "\\Gamma^1_{1k} + \\Gamma^2_{2k} + \\Gamma^3_{3k}");
    assert_eq!(answer.term.latex, "\\Gamma^i_{ik}");
    assert_eq!(answer.sum.unicode, "Γ^1_{1k} + Γ^2_{2k} + Γ^3_{3k}");
    assert_eq!(answer.sum.note, "Gamma^1_1k + Gamma^2_2k + Gamma^3_3k");
    let [letter] = answer.letters.as_slice() else { panic!("{answer:?}") };
    assert_eq!((letter.values.join(" ").as_str(), &letter.source), ("1 2 3", &RangeSource::Custom));
    assert!(!letter.range_declared());
}

#[test]
fn a_symmetric_product_is_collected_in_the_order_of_first_appearance() {
    let want = "g^{11} T_{11} + 2 g^{12} T_{12} + 2 g^{13} T_{13} + g^{22} T_{22} + 2 g^{23} T_{23} + g^{33} T_{33}";
    let answer = gives(&declared("$S = ‸g^{ij} T_{ij}$"), want);
    assert_eq!((answer.choices, answer.terms.len(), answer.vanished.len()), (9, 6, 0));
    assert_eq!(answer.terms[1].unicode, "2 g^{12} T_{12}");
    assert!(answer.letters.iter().all(|letter| letter.source == RangeSource::Family && letter.range_declared()));
}

#[test]
fn a_kernel_of_unknown_symmetry_has_none() {
    let plain = answer(&declared("$S = ‸H^{ij} T_{ij}$"), Host::Markdown);
    assert_eq!((plain.terms.len(), plain.collected), (9, true));
}

#[test]
fn on_a_summed_letter_its_sum_alone_elsewhere_all() {
    let one = "H^{1j} T_{1j} + H^{2j} T_{2j} + H^{3j} T_{3j}";
    for text in ["$S = H^{‸ij} T_{ij}$", "$S = H^{ij} T_{‸ij}$"] {
        assert_eq!(gives(&declared(text), one).letters.len(), 1);
    }
    for text in ["$S = H^{ij}‸ T_{ij}$", "$S = H‸^{ij} T_{ij}$", "$S = H^{ij} T_{ij}‸$", "$S = H^{ij} ‸T_{ij}$"]
    {
        assert_eq!(answer(&declared(text), Host::Markdown).letters.len(), 2, "{text}");
    }
}

#[test]
fn an_epsilon_with_a_free_index_loses_what_has_equal_values() {
    let want = "\\epsilon_{i12} A_1 B_2 + \\epsilon_{i13} A_1 B_3 + \\epsilon_{i21} A_2 B_1 + \\epsilon_{i23} A_2 B_3 \
                + \\epsilon_{i31} A_3 B_1 + \\epsilon_{i32} A_3 B_2";
    let answer = gives("$C_i = ‸\\epsilon_{ijk} A_j B_k$", want);
    let gone = left_out(&answer);
    assert_eq!(gone.len(), 3);
    assert_eq!(gone[0], "\\epsilon_{i11} A_1 B_1 (\\epsilon_{i11})");
}

#[test]
fn an_antisymmetric_square_is_twice_half_of_it() {
    let answer = gives(&declared("$S = ‸F_{ij} F^{ij}$"), "2 F_{12} F^{12} + 2 F_{13} F^{13} + 2 F_{23} F^{23}");
    let gone: Vec<String> = (1..=3).map(|n| format!("F_{{{n}{n}}} F^{{{n}{n}}} (F_{{{n}{n}}})")).collect();
    assert_eq!(left_out(&answer), gone);
}

#[test]
fn antisymmetric_with_symmetric_leaves_nothing() {
    let answer = gives(&declared("$S = ‸F_{ij} T^{ij}$"), "0");
    let gone = left_out(&answer);
    assert_eq!(gone.len(), 9);
    assert_eq!(gone[..2], ["F_{11} T^{11} (F_{11})", "F_{12} T^{12} (cancels)"]);
}

#[test]
fn numbers_before_a_term_are_multiplied_in() {
    let half = "$S = -‸\\frac{1}{2} T_{ij} T_{ij}$";
    let text = half.replace("T_{ij} T_{ij}", "T_{ij} v_i v_j");
    let text = format!("<!-- indexwise: i j run from 1 to 2; T_{{ij}} is symmetric; v_i is a vector -->\n\n{text}");
    gives(&text, "-\\frac{1}{2} T_{11} v_1 v_1 - T_{12} v_1 v_2 - \\frac{1}{2} T_{22} v_2 v_2");
    gives(&text.replace("\\frac{1}{2}", "3"), "-3 T_{11} v_1 v_1 - 6 T_{12} v_1 v_2 - 3 T_{22} v_2 v_2");
    gives(&text.replace("\\frac{1}{2}", "1/2"), "-1/2 T_{11} v_1 v_1 - T_{12} v_1 v_2 - 1/2 T_{22} v_2 v_2");
    gives(&text.replace("\\frac{1}{2}", "x"), "-x T_{11} v_1 v_1 - 2 x T_{12} v_1 v_2 - x T_{22} v_2 v_2");
    gives(&text.replace("\\frac{1}{2}", "0.5"), "-0.5 T_{11} v_1 v_1 - T_{12} v_1 v_2 - 0.5 T_{22} v_2 v_2");
}

#[test]
fn fields_commute_and_matrices_do_not() {
    let two = |text: &str| format!("<!-- indexwise: i j run from 1 to 2; T_{{ij}} is symmetric -->\n\n{text}");
    let answer = gives(&two("$S = ‸T_{ij} w_i w_j$"), "T_{11} w_1 w_1 + 2 T_{12} w_1 w_2 + T_{22} w_2 w_2");
    assert_eq!(answer.commuting, ["w"]);
    let apart = "T_{11} \\gamma_1 \\gamma_1 + T_{12} \\gamma_1 \\gamma_2 + T_{21} \\gamma_2 \\gamma_1 + T_{22} \\gamma_2 \\gamma_2";
    gives(&two("$S = ‸T_{ij} \\gamma_i \\gamma_j$"), apart);
    let declared = two("$S = ‸T_{ij} w_i w_j$").replace("is symmetric", "is symmetric; w_i does not commute");
    assert_eq!(gives(&declared, &apart.replace("\\gamma", "w")).commuting.len(), 0);
}

#[test]
fn kronecker_s_delta_is_taken_at_its_word() {
    let answer = gives("$S = ‸\\delta_{ij} A_i B_j$", "A_1 B_1 + A_2 B_2 + A_3 B_3");
    assert_eq!(left_out(&answer)[0], "\\delta_{12} A_1 B_2 (\\delta_{12})");
    gives("$n = ‸\\delta_{ij} \\delta_{ij}$", "3");
}

#[test]
fn derivatives_commute() {
    let text = "$S_k = ‸\\partial_i \\partial_j H_k T^{ij}$";
    let text = declared(text).replace("1 to 3", "1 to 2");
    let want = "\\partial_1 \\partial_1 H_k T^{11} + 2 \\partial_1 \\partial_2 H_k T^{12} + \\partial_2 \\partial_2 H_k T^{22}";
    gives(&text, want);
}

#[test]
fn a_range_of_names_is_written_with_them() {
    let text = "<!-- indexwise: \\mu \\nu run over t r \\theta \\phi; g_{\\mu\\nu} is the metric -->\n\n";
    let want = "g_{tt} v^t + g_{rt} v^r + g_{\\theta t} v^\\theta + g_{\\phi t} v^\\phi";
    let answer = gives(&format!("{text}$v_t = ‸g_{{\\mu t}} v^\\mu$"), want);
    assert_eq!(answer.sum.unicode, "g_{tt} v^t + g_{rt} v^r + g_{θt} v^θ + g_{ϕt} v^ϕ");
    let spatial = text.replace("; g", "; i j are the spatial part of \\mu \\nu; g");
    let answer = gives(&format!("{spatial}$s = ‸A_i v^i$"), "A_r v^r + A_\\theta v^\\theta + A_\\phi v^\\phi");
    assert_eq!(answer.letters[0].source, RangeSource::Family);
}

#[test]
fn components_in_another_frame_keep_their_prime() {
    let want = "Q_{1'j} v^{1'} + Q_{2'j} v^{2'} + Q_{3'j} v^{3'}";
    let answer = gives("$s_j = ‸Q_{i'j} v^{i'}$", want);
    assert_eq!(answer.letters[0].values, ["1'", "2'", "3'"]);
    assert_eq!(answer.sum.note, "Q_{1' j} v^{1'} + Q_{2' j} v^{2'} + Q_{3' j} v^{3'}");
    let named = "<!-- indexwise: i' j' run over r \\theta -->\n\n$s = ‸v_{i'} v^{i'}$";
    gives(named, "v_{r'} v^{r'} + v_{\\theta'} v^{\\theta'}");
}

#[test]
fn values_of_two_digits_stand_apart() {
    let text = "<!-- indexwise: p q run from 9 to 10; S_{pq} is symmetric -->\n\n$s = ‸S_{pq} S_{pq}$";
    let answer = gives(text, "S_{99} S_{99} + 2 S_{9\\,10} S_{9\\,10} + S_{10\\,10} S_{10\\,10}");
    assert_eq!(answer.sum.note, "S_99 S_99 + 2 S_{9 10} S_{9 10} + S_{10 10} S_{10 10}");
}

#[test]
fn a_range_that_is_not_declared_is_custom_or_the_coordinates() {
    let values = |text: &str| {
        let letter = answer(text, Host::Markdown).letters.remove(0);
        (letter.values.join(" "), letter.source)
    };
    assert_eq!(values("$s = ‸A_\\mu B^\\mu$"), ("0 1 2 3".to_owned(), RangeSource::Custom));
    let cartesian = "<!-- indexwise: \\mu \\nu are cartesian -->\n\n$s = ‸A_\\mu B_\\mu$";
    assert_eq!(values(cartesian), ("1 2 3".to_owned(), RangeSource::Custom));
    let open = "<!-- indexwise: i j run from 1 to n -->\n\n$s = ‸A_i B^i$";
    assert_eq!(values(open), ("1 2 3".to_owned(), RangeSource::Open("n".into())));
    let named = "<!-- indexwise: t r z are the coordinates -->\n\n$s = ‸A_\\mu B^\\mu$";
    assert_eq!(values(named), ("t r z".to_owned(), RangeSource::Coordinates));
    assert_eq!(values(&named.replace("\\mu", "i")), ("r z".to_owned(), RangeSource::Coordinates));
    let slot = "<!-- indexwise: i j run over r z; T_{ij} is symmetric -->\n\n$s = ‸T_{kl} B^k C^l$";
    assert_eq!(values(slot), ("r z".to_owned(), RangeSource::Family));
    let single = named.replace("t r z are the coordinates", "r is a coordinate");
    assert_eq!(values(&single), ("0 1 2 3".to_owned(), RangeSource::Custom));
    let sized = "<!-- indexwise: i j range over 2 dimensions -->\n\n$s = ‸A_i B^i$";
    assert_eq!(values(sized), ("1 2".to_owned(), RangeSource::Family));
    assert_eq!(values(&sized.replace(" -->", "; \\rho z are the coordinates -->")).0, "\\rho z");
}

#[test]
fn pairs_on_one_level_below_a_line_in_brackets_and_in_the_second_term() {
    gives("$s = ‸n_i n_i$", "n_1 n_1 + n_2 n_2 + n_3 n_3");
    gives("$s = \\frac{A}{‸v_i w_i}$", "v_1 w_1 + v_2 w_2 + v_3 w_3");
    gives("$s_j = p (q_j - ‸v_i w_{ij})$", "-v_1 w_{1j} - v_2 w_{2j} - v_3 w_{3j}");
    gives("$s_j = v_i H_{ij} + ‸a_k Q_{kj}$", "a_1 Q_{1j} + a_2 Q_{2j} + a_3 Q_{3j}");
    gives("$s_j = v_i H_{ij} ‸- a_k Q_{kj}$", "-a_1 Q_{1j} - a_2 Q_{2j} - a_3 Q_{3j}");
    let over = "v^1 \\frac{\\partial f}{\\partial x^1} + v^2 \\frac{\\partial f}{\\partial x^2} + v^3 \\frac{\\partial f}{\\partial x^3}";
    gives("$s = ‸v^i \\frac{\\partial f}{\\partial x^i}$", over);
}

#[test]
fn a_bracket_takes_its_values_together() {
    let want = "v^1 (A_1 + B_1) + v^2 (A_2 + B_2) + v^3 (A_3 + B_3)";
    gives("$s = ‸v^i (A_i + B_i)$", want);
    gives("$s = v^i (A_i + B_‸i)$", want);
    gives("$s = v^i (A_i + ‸B_i)$", want);
}

#[test]
fn sums_inside_a_bracket_stay_where_another_is_written_out() {
    gives("$s = ‸v^i (A_{ij} w^j + B_i)$", "v^1 (A_{1j} w^j + B_1) + v^2 (A_{2j} w^j + B_2) + v^3 (A_{3j} w^j + B_3)");
}

#[test]
fn what_is_not_looked_into_is_written_and_not_compared() {
    let written = answer("$s = ‸A_i A_j \\sqrt{B_i C_j}$", Host::Markdown);
    assert_eq!((written.terms.len(), written.collected), (9, false));
    assert!(written.sum.latex.starts_with("A_1 A_1 \\sqrt{B_1 C_1} + A_1 A_2 \\sqrt{B_1 C_2}"), "{written:?}");
}

#[test]
fn indices_made_by_macros() {
    let text = |call: &str| {
        format!(
            "\\newcommand{{\\mn}}{{{{ij}}}}\\newcommand{{\\tra}}{{H^{{ij}}T_{{ij}}}}\n% indexwise: i j run from 1 to 2; \
             T_{{ij}} is symmetric\n\\begin{{document}}\\[ S = {call} \\]\\end{{document}}"
        )
    };
    let want = "H^{11} T_{11} + H^{12} T_{12} + H^{21} T_{21} + H^{22} T_{22}";
    for call in ["‸H^\\mn T_\\mn", "H^‸\\mn T_\\mn", "‸\\tra"] {
        let made = answer(&text(call), Host::Latex);
        assert_eq!((made.sum.latex.as_str(), made.collected), (want, true), "{call}");
    }
}

#[test]
fn notes_and_their_conventions() {
    let note =
        "Sheet notes\n\nconventions\n  i j run from 1 to 2\n  g_ij is the metric\n\nThe trace:\n\n  K = ‸g^ij K_ij\n";
    let traced = answer(note, Host::Note);
    assert_eq!(traced.sum.note, "g^11 K_11 + g^12 K_12 + g^21 K_21 + g^22 K_22");
    assert_eq!(traced.letters[0].source, RangeSource::Family);
}

#[test]
fn what_is_not_written_out_says_why() {
    refuses("Only ‸words.", "no formula stands there");
    refuses("$x ‸= y$", "no summed index stands there");
    refuses("$A_i ‸= B_i$", "no summed index stands there");
    refuses("$A_i = ‸B_i + C_j D_{ij}$", "no summed index stands there");
    refuses("$s = \\sum_{i=1}^3 A_‸i B_i$", "i is summed by a sum sign; only sums by repeated letters are written out");
    refuses("$s = A_‸i B_i C_i D_i$", "i stands more than twice in the product");
    refuses("<!-- indexwise: skip this -->\n\n$s = ‸A_i B_i$", "the author says to skip this formula");
    refuses("$s = ‸A_i B_i$ (no sum over i).", "the text says that no sum is meant");
    let matrix = "$s_{jk} = ‸A_i B^i \\begin{pmatrix} a & b \\end{pmatrix}_{jk}$";
    refuses(matrix, "the formula is not read there: a matrix or a list of cases is not looked into");
    let wide = "<!-- indexwise: \\mu \\nu \\rho \\sigma \\alpha run from 0 to 3 -->\n\n";
    let five = "$s = ‸R_{\\mu\\nu\\rho\\sigma} R^{\\mu\\nu\\rho\\sigma} A_\\alpha B^\\alpha$";
    refuses(&format!("{wide}{five}"), "the sum has 1024 terms, more than the budget of 256");
    let long = "<!-- indexwise: i j run from 1 to 300 -->\n\n$s = ‸A_i B_i$";
    refuses(long, "the sum has 300 terms, more than the budget of 256");
    let huge = "<!-- indexwise: i j run from 1 to 4000000000 -->\n\n$s = ‸A_i B_i$";
    assert!(matches!(asked(huge, Host::Markdown), Err(Refusal::TooMany(_))));
    let four = five.replace(" A_\\alpha B^\\alpha", "");
    let squared = answer(&format!("{wide}{four}"), Host::Markdown);
    // 21 independent pairs of pairs; those of two different pairs come eight times, the others four times.
    assert_eq!((squared.choices, squared.terms.len()), (256, 21));
    assert!(squared.terms[0].latex.starts_with("4 R_{0101} "), "{}", squared.terms[0].latex);
}
