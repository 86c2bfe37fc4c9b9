//! What papers imply of their conventions, for an author who begins to write them down.
//!
//! Conventions of a project hold for all of its papers, so that habits are counted over all of them: letters that
//! one paper keeps on levels and another does not imply nothing. What the author declares already is left out.

use compact_str::CompactString;
use indexwise_grammar::lines::Lines;
use indexwise_grammar::macros::Macros;
use indexwise_grammar::tree::{Claim, Statement};
use rustc_hash::FxHashSet;

use crate::conventions::built_in::CLASSES;
use crate::conventions::declared::Declared;
use crate::conventions::implied::{Implied, Stated, families, metric, symmetry};
use crate::conventions::inferred::Evidence;
use crate::conventions::prices::Prices;
use crate::terms::symmetries::Customs;
use crate::terms::{Eyes, sides};

use super::judging::Trees;
use super::{Cancel, Memory, Paper, Sketched};

/// What the papers of a project imply, gathered paper by paper.
#[derive(Debug, Default)]
pub struct Implications {
    evidence: Evidence,
    /// Letters and kernels that a paper declares, so that nothing need be implied of them.
    known: FxHashSet<CompactString>,
    /// With the keys by which the same symmetry is known.
    symmetries: Vec<(String, Implied)>,
}

/// More symmetries than these are not told: each is tried by itself if need be.
const MOST_SYMMETRIES: usize = 40;

impl Implications {
    /// What a paper shows.
    pub fn of(paper: &Paper, cancel: &Cancel) -> Self {
        let (sketched, _, all) = Memory::default().read(paper, cancel);
        let mut own = Self::default();
        for (number, document) in sketched.iter().enumerate().filter(|_| !cancel.is_cancelled()) {
            let (declared, macros) = (&document.read.declared, &document.read.macros);
            let prices = Prices { file: &all, paper: &all, declared, macros, inquiries: None };
            own.note_known(&prices);
            let path = paper.documents.get(number).map(|source| source.path.as_str()).unwrap_or_default();
            own.note_symmetries(document, &prices, path, cancel);
        }
        own.evidence = Evidence::clone(&all);
        own
    }

    /// Puts in what another paper shows. The sentences follow the order in which papers are put in.
    pub fn add(&mut self, other: Self) {
        self.evidence.add(&other.evidence);
        self.known.extend(other.known);
        for (key, implied) in other.symmetries {
            self.note_symmetry(key, implied);
        }
    }

    /// The sentences, each once: families, the metric, symmetries.
    pub fn sentences(self) -> Vec<Implied> {
        let (declared, macros) = (Declared::default(), Macros::default());
        let prices = Prices {
            file: &self.evidence,
            paper: &self.evidence,
            declared: &declared,
            macros: &macros,
            inquiries: None,
        };
        let known = |name: &str| self.known.contains(name);
        let mut out = families(&prices, &known);
        out.extend(metric(&prices, &known));
        out.extend(self.symmetries.into_iter().map(|(_, implied)| implied));
        out
    }

    /// Letters of families, labels, components and metrics that are declared.
    fn note_known(&mut self, prices: &Prices<'_>) {
        let meanings = &prices.declared.meanings;
        let letters = CLASSES.iter().flat_map(|class| prices.index_letters(*class));
        self.known
            .extend(letters.filter(|letter| meanings.family_number(letter).is_some() || meanings.is_not_index(letter)));
        self.known.extend(["g", "\\eta"].into_iter().filter(|kernel| meanings.declares(kernel)).map(Into::into));
        self.known.extend(meanings.dimensions.iter().cloned());
    }

    /// Symmetries that formulas of a document state.
    fn note_symmetries(&mut self, document: &Sketched, prices: &Prices<'_>, path: &str, cancel: &Cancel) {
        let customs = Customs::of(&document.read.text, prices);
        let lines = Lines::new(&document.read.text);
        let mut trees = Trees::default();
        let relations = document.statements.iter().filter(|statement| statement.kept.sides.len() > 1);
        for statement in relations.take_while(|_| !cancel.is_cancelled()) {
            let reading = statement.read(prices);
            if !reading.odd.is_empty() {
                continue;
            }
            let eyes = Eyes::new(&statement.kept, &reading.choice, prices, customs);
            let found =
                trees.statement(&document.read, statement.formula, statement.span(), |tree| stated(tree, &eyes));
            for Stated { key, sentence, span } in found {
                let place = Some((path.to_owned(), lines.line(span.start) as usize + 1));
                self.note_symmetry(key, Implied { sentence, reason: "a formula states it".to_owned(), place });
            }
        }
    }

    fn note_symmetry(&mut self, key: String, implied: Implied) {
        if self.symmetries.len() < MOST_SYMMETRIES && self.symmetries.iter().all(|(other, _)| *other != key) {
            self.symmetries.push((key, implied));
        }
    }
}

/// Symmetries that a statement states by equalities.
fn stated(statement: &Statement, eyes: &Eyes<'_>) -> Vec<Stated> {
    let sides = sides(statement, eyes);
    let equalities = sides.windows(2).zip(&statement.relations);
    let equalities = equalities.filter(|(_, relation)| relation.claim() == Claim::Equality);
    equalities.filter_map(|(pair, _)| symmetry(pair.first()?, pair.get(1)?, eyes)).collect()
}

#[cfg(test)]
mod tests {
    #![allow(clippy::indexing_slicing)]
    use indexwise_grammar::hosts::Host;

    use super::*;
    use crate::paper::{SharedConventions, Source, problems};
    use indexwise_grammar::span::Span;

    fn paper(path: &str, text: &str) -> Paper {
        let host = if path.ends_with(".inote") { Host::Note } else { Host::Latex };
        let source = Source { path: path.to_owned(), text: text.into(), host };
        Paper { documents: vec![source], ..Paper::default() }
    }

    /// What texts imply together; every sentence must be one that can be read.
    #[track_caller]
    fn sentences(texts: &[(&str, &str)]) -> Vec<String> {
        let mut all = Implications::default();
        for (path, text) in texts {
            all.add(Implications::of(&paper(path, text), &Cancel::default()));
        }
        let found: Vec<String> = all.sentences().into_iter().map(|implied| implied.sentence).collect();
        let text = found.join("\n");
        let mut start = 0;
        let spans = found.iter().map(|sentence| {
            let span = Span::new(start, start + sentence.len());
            start += sentence.len() + 1;
            (sentence.clone(), span)
        });
        let sentences = spans.collect();
        assert_eq!(problems(&SharedConventions { sentences, text: text.into(), ..Default::default() }), []);
        found
    }

    fn of(text: &str) -> Vec<String> {
        sentences(&[("shell.tex", text)])
    }

    /// Sums with both indices below, in Latin letters.
    const CARTESIAN: &str = "$t_i = \\sigma_{ij} n_j$ $q_i = \\kappa_{ij} g_j$ $f_j = \\sigma_{ij} m_i$ \
        $A_{ij} = B_{ik} C_{kj}$ $D_{ij} = E_{ik} F_{kj}$ ";

    /// Sums with one index above and one below, in Greek letters.
    const ON_LEVELS: &str = "$t^\\alpha = N^{\\alpha\\beta} n_\\beta$ $u_\\alpha = g_{\\alpha\\beta} u^\\beta$ \
        $w_\\alpha = g_{\\alpha\\beta} w^\\beta$ $M^\\alpha{}_\\beta = N^{\\alpha\\gamma} g_{\\gamma\\beta}$ \
        $q^\\alpha = K^{\\alpha\\beta} h_\\beta$ $Q^\\beta = K^{\\alpha\\beta} h_\\alpha$ ";

    #[test]
    fn what_shows_nothing_implies_nothing() {
        for text in ["", "words", "$x = y$", "$T_r = 3$", "$t_i = 0$"] {
            assert_eq!(of(text), [""; 0], "{text}");
        }
    }

    #[test]
    fn families_and_levels_are_those_of_the_habits() {
        assert_eq!(of(CARTESIAN), ["i j k range over n dimensions", "i j k are cartesian"]);
        let greek = ["\\alpha \\beta \\gamma range over n dimensions", "g_{\\alpha \\beta} is the metric"];
        assert_eq!(of(ON_LEVELS), greek);
        let both = [greek[0], "i j k range over N dimensions", "i j k are cartesian", greek[1]];
        assert_eq!(sentences(&[("a.tex", CARTESIAN), ("b.tex", ON_LEVELS)]), both);
    }

    #[test]
    fn papers_that_disagree_on_levels_imply_none() {
        let other = ON_LEVELS.replace("\\alpha", "i").replace("\\beta", "j").replace("\\gamma", "k");
        let found = sentences(&[("a.tex", CARTESIAN), ("b.tex", &other)]);
        assert_eq!(found, ["i j k range over n dimensions"]);
    }

    #[test]
    fn what_is_declared_is_not_implied() {
        let text = format!("% indexwise: i j k run from 1 to 3\n{CARTESIAN}");
        assert_eq!(of(&text), [""; 0]);
        let text = format!("% indexwise: g_{{\\alpha\\beta}} is the metric\n{ON_LEVELS}");
        assert_eq!(of(&text), ["\\alpha \\beta \\gamma range over n dimensions"]);
    }

    #[test]
    fn a_dimension_is_no_index_letter() {
        let text = format!("{CARTESIAN} $A_{{in}} = B_{{im}} C_{{mn}}$ $D_{{in}} = E_{{im}} F_{{mn}}$");
        assert_eq!(of(&text)[0], "i j k m n range over N dimensions");
    }

    /// What one formula adds to the Cartesian ones.
    #[track_caller]
    fn stated(formula: &str) -> Vec<String> {
        of(&format!("{CARTESIAN} {formula}")).into_iter().filter(|sentence| sentence.contains("symmetric")).collect()
    }

    #[test]
    fn symmetries_are_those_that_formulas_state() {
        assert_eq!(stated("$S_{ij} = S_{ji}$ and $S_{kl} = S_{lk}$"), ["S_{i j} is symmetric"]);
        assert_eq!(stated("$W_{ij} = - W_{ji}$"), ["W_{i j} is antisymmetric"]);
        assert_eq!(stated("$2 S_{ij} = 2 S_{ji}$"), ["S_{i j} is symmetric"]);
        assert_eq!(
            stated("$C_{ijkl} = C_{jikl} = C_{jilk}$"),
            ["C_{i j k l} is symmetric in i j", "C_{j i k l} is symmetric in k l",]
        );
        assert_eq!(stated("$\\hat S_{ij} = \\hat S_{ji}$"), ["\\hat S_{i j} is symmetric"]);
    }

    #[test]
    fn other_formulas_state_no_symmetry() {
        for formula in [
            "$S_{ij} \\neq S_{ji}$",
            "$S_{ij} \\approx S_{ji}$",
            "$S_{ij} := S_{ji}$",
            "$S_{ij} = T_{ji}$",
            "$S_{ij} = 2 S_{ji}$",
            "$S_{ij} = S_{ij}$",
            "$S_{ij} = S_{ji} + A_{ij}$",
            "$C_{ijkl} = C_{klij}$",
            "$\\delta_{ij} = \\delta_{ji}$",
            "$u_{i,j} = u_{j,i}$",
            "$S_{12} = S_{21}$",
            "% indexwise: S_{ij} is a tensor\n$S_{ij} = S_{ji}$",
            "% indexwise: skip this\n$S_{ij} = S_{ji}$",
        ] {
            assert_eq!(stated(&format!("\n{formula}")), [""; 0], "{formula}");
        }
    }

    #[test]
    fn a_formula_is_told_by_its_line() {
        let implications = Implications::of(&paper("a/b.inote", "Words\n\n  S_ij = S_ji\n"), &Cancel::default());
        let places: Vec<_> = implications.sentences().into_iter().filter_map(|implied| implied.place).collect();
        assert_eq!(places, [("a/b.inote".to_owned(), 3)]);
    }
}
