//! What lights up with the letter under the cursor: an index with its partner, or with every place where it stands free
//! in its statement; a kernel, a label or a macro with all its places in the document. What a macro writes does not light
//! up, since the macro's name stands for the macro.

use indexwise_grammar::span::Span;

use crate::changes::is_typed;
use crate::paper::View;

use super::commands::calls;
use super::kernels::{in_sentences, uses};
use super::labels::mentions;
use super::under::{Under, under};

/// A place that lights up.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Highlight {
    /// Where it is.
    pub span: Span,
    /// Whether it is the other end of the sum that the cursor stands in, rather than a further place of the same thing.
    pub partner: bool,
}

/// The places that light up with what stands at a byte offset, in the order of the text; none if nothing does.
pub fn highlight(view: &View, document: usize, offset: u32) -> Vec<Highlight> {
    let text = view.text(document);
    let same = |span: Span| Highlight { span, partner: false };
    let mut found: Vec<Highlight> = match under(view, document, offset) {
        None => Vec::new(),
        Some(Under::Other(part)) => vec![same(part.span)],
        Some(Under::Index(held)) => {
            let typed = held.spans.iter().filter(|span| is_typed(text, **span, &held.index.letter));
            typed.map(|span| Highlight { span: *span, partner: held.is_partner(*span) }).collect()
        }
        Some(Under::Kernel(_, kernel)) => {
            let declared = in_sentences(view, document, &kernel).into_iter().map(|(place, _)| place);
            let all = uses(view, document, &kernel).into_iter().chain(declared.filter(|place| !place.bare));
            all.filter(|place| place.typed).map(|place| same(place.span)).collect()
        }
        Some(Under::Label(own)) => {
            mentions(view, document).into_iter().filter(|one| one.name == own.name).map(|one| same(one.span)).collect()
        }
        Some(Under::Macro(_, own)) => calls(view, document, &own).into_iter().map(same).collect(),
    };
    found.sort_unstable();
    found.dedup_by_key(|one| one.span);
    found
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;
    use crate::editing::cursor::{marked, view, with_cursor};
    use indexwise_grammar::hosts::Host;

    #[track_caller]
    fn lights(host: Host, text: &str, want: &str) -> Vec<Highlight> {
        let (text, offset) = with_cursor(text);
        let found = highlight(&view(&text, host), 0, offset);
        let spans: Vec<Span> = found.iter().map(|one| one.span).collect();
        assert_eq!(marked(&text, &spans), want);
        found
    }

    #[test]
    fn a_dummy_lights_up_in_its_term() {
        let found =
            lights(Host::Markdown, "$A_{‸i} B_i C_k + D_i E_i F_k = G_k$", "$A_{⟦i⟧} B_⟦i⟧ C_k + D_i E_i F_k = G_k$");
        assert_eq!(found.iter().map(|one| one.partner).collect::<Vec<_>>(), [false, true]);
    }

    #[test]
    fn a_free_index_lights_up_in_all_rows() {
        let found = lights(
            Host::Latex,
            "\\begin{align} A_i &= B_{ik} n_‸k + C_i \\\\ &= D_i\\end{align}",
            "\\begin{align} A_i &= B_{i⟦k⟧} n_⟦k⟧ + C_i \\\\ &= D_i\\end{align}",
        );
        assert!(found[0].partner && !found[1].partner);
        lights(
            Host::Latex,
            "\\begin{align} A_i &= B_{‸ik} n_k + C_i \\\\ &= D_i\\end{align}",
            "\\begin{align} A_⟦i⟧ &= B_{⟦i⟧k} n_k + C_⟦i⟧ \\\\ &= D_⟦i⟧\\end{align}",
        );
    }

    #[test]
    fn a_bracket_brings_its_index_out_and_keeps_its_dummies() {
        lights(Host::Markdown, "$n_i (A_{‸i} + B_i) = q$", "$n_⟦i⟧ (A_{⟦i⟧} + B_⟦i⟧) = q$");
        lights(
            Host::Markdown,
            "$n_k (A_{‸i} B_i + C_j C_j) = q_k D_{ii}$",
            "$n_k (A_{⟦i⟧} B_⟦i⟧ + C_j C_j) = q_k D_{ii}$",
        );
    }

    #[test]
    fn a_sum_sign_lights_up_with_what_it_binds() {
        lights(Host::Markdown, "$\\sum_{‸a=1}^N w_a v_a u_a = q$", "$\\sum_{⟦a⟧=1}^N w_⟦a⟧ v_⟦a⟧ u_⟦a⟧ = q$");
    }

    #[test]
    fn a_square_stands_for_itself() {
        lights(Host::Markdown, "$(\\partial_{‸i} w)^2 + A_i A_i = q$", "$(\\partial_{⟦i⟧} w)^2 + A_i A_i = q$");
    }

    #[test]
    fn letters_of_arguments_belong_together() {
        let found = lights(
            Host::Markdown,
            "$T^{ab} = \\int G^{ab}(x^‸c, y^c) \\rho(y^c) dV$",
            "$T^{ab} = \\int G^{ab}(x^⟦c⟧, y^⟦c⟧) \\rho(y^⟦c⟧) dV$",
        );
        assert!(found.iter().all(|one| !one.partner));
    }

    #[test]
    fn a_kernel_lights_up_with_its_number_of_slots() {
        lights(
            Host::Markdown,
            "<!-- indexwise: E_{ij} is symmetric -->\n$‸E_{ij} = E_{ji}$, a field $E_i$, and $q = E_{kk}$",
            "<!-- indexwise: ⟦E⟧_{ij} is symmetric -->\n$⟦E⟧_{ij} = ⟦E⟧_{ji}$, a field $E_i$, and $q = ⟦E⟧_{kk}$",
        );
        lights(
            Host::Latex,
            "% indexwise: ‸g_{ij} is the metric; \\Gamma^i_{jk} is the Christoffel symbol of g\n$g_{ij}$ and $g$",
            "% indexwise: ⟦g⟧_{ij} is the metric; \\Gamma^i_{jk} is the Christoffel symbol of ⟦g⟧\n$⟦g⟧_{ij}$ and $g$",
        );
        lights(Host::Note, "Sag:\n\n  s‸igma_ij n_j = sigma_ik n_k\n", "Sag:\n\n  ⟦sigma⟧_ij n_j = ⟦sigma⟧_ik n_k\n");
    }

    #[test]
    fn labels_and_macros_light_up() {
        lights(
            Host::Latex,
            "\\[u_i = w_i \\label{eq:u}\\] see \\eqref{‸eq:u} and \\ref{eq:v}",
            "\\[u_i = w_i \\label{⟦eq:u⟧}\\] see \\eqref{⟦eq:u⟧} and \\ref{eq:v}",
        );
        lights(
            Host::Latex,
            "\\newcommand{\\E}{\\kappa}$\\‸E_{ij} = \\E_{ji}$",
            "\\newcommand{\\E}{\\kappa}$⟦\\E⟧_{ij} = ⟦\\E⟧_{ji}$",
        );
    }

    #[test]
    fn nothing_lights_up_in_prose() {
        lights(Host::Markdown, "The ‸sheet $A_i = B_i$", "The sheet $A_i = B_i$");
        assert!(highlight(&view("$A_i$", Host::Markdown), 3, 1).is_empty());
        assert!(highlight(&view("$A_i$", Host::Markdown), 0, 99).is_empty());
    }
}
