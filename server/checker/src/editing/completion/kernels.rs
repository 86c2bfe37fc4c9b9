//! Declared kernels whose name begins as typed, with their slots as the author sets them.

use compact_str::CompactString;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::tree::{Atom, Factor, ItemKind, Kernel, Level, Script};
use indexwise_grammar::write::{Dialect, write_factor};

use crate::conventions::built_in::bare_letter;
use crate::conventions::inferred::Prices;
use crate::conventions::meanings::{KernelKey, Known, Role};
use crate::paper::View;

use super::probe::Probe;
use super::typed::name_at;
use super::{Suggestion, SuggestionKind};

/// Declared kernels at a place where a name is being typed in a formula.
pub(super) fn kernels(view: &View, document: usize, offset: u32) -> Option<Vec<Suggestion>> {
    let (text, host) = (view.text(document), view.host(document));
    let span = name_at(text, offset as usize, host)?;
    Probe::without(view, document, span)?;
    let typed = span.of(text);
    let (prices, meanings) = (view.prices(document)?, &view.declared(document)?.meanings);
    // Sorted below.
    #[allow(clippy::iter_over_hash_type)]
    let mut known: Vec<(&KernelKey, &Known)> = meanings
        .kernels
        .iter()
        .filter(|((name, _), known)| !known.slots.is_empty() && begins(name, typed, host))
        .collect();
    known.sort_by(|one, two| one.0.cmp(two.0));
    let suggestion = |((name, _), known): (&KernelKey, &Known)| {
        let text = spelt(name, known, &prices, host)?;
        let (label, detail) = (text.clone(), detail(known));
        Some(Suggestion {
            label,
            detail,
            documentation: None,
            replaces: span,
            text,
            kind: SuggestionKind::Kernel,
            rank: 0,
        })
    };
    Some(known.into_iter().filter_map(suggestion).collect())
}

fn begins(name: &str, typed: &str, host: Host) -> bool {
    let name = if host == Host::Note { name.trim_start_matches('\\') } else { name };
    name.starts_with(typed)
}

/// What is declared of a kernel, in a few words.
fn detail(known: &Known) -> String {
    let role = match &known.role {
        Some(Role::Metric { .. }) => "the metric",
        Some(Role::Christoffel) => "a Christoffel symbol",
        Some(Role::Curvature(_)) => "a tensor of curvature",
        None => "declared",
    };
    let whole = known.exchanges.iter().find(|exchange| exchange.slots.len() == known.slots.len());
    match whole.filter(|_| known.role.is_none()) {
        Some(exchange) if exchange.antisymmetric => "antisymmetric".to_owned(),
        Some(_) => "symmetric".to_owned(),
        None => role.to_owned(),
    }
}

/// A kernel with its slots in the letters of its declaration, staggered or stacked as the paper mostly does.
fn spelt(name: &str, known: &Known, prices: &Prices<'_>, host: Host) -> Option<String> {
    let runs = known.slots.chunk_by(|one, two| one.level == two.level);
    let script = |run: &[indexwise_grammar::conventions::Slot]| {
        let items = run.iter().map(|slot| ItemKind::Letter(slot.letter.clone())).collect();
        run.first().map(|slot| Script::of(slot.level, items))
    };
    let mut scripts: Vec<Script> = runs.filter_map(script).collect();
    let count =
        |level: Level| u8::try_from(known.slots.iter().filter(|slot| slot.level == level).count()).unwrap_or(u8::MAX);
    let [staggered, stacked] = prices.staggering(&(name.into(), count(Level::Up), count(Level::Down)));
    let stacks = scripts.len() == 2 && (stacked > staggered || staggered == 0 && known.role == Some(Role::Christoffel));
    scripts.iter_mut().skip(1).for_each(|script| script.staggered = !stacks);
    let letter = CompactString::from(bare_letter(name));
    let kernel = Kernel { name: name.into(), letter, bold: false, word: false };
    let factor = Factor { scripts, ..Factor::of(Atom::Kernel(kernel)) };
    let written = write_factor(&factor, if host == Host::Note { Dialect::Note } else { Dialect::Latex });
    written.complete.then_some(written.text)
}
