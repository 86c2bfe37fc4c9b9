//! Renaming a kernel in all documents of a paper: its uses, and the sentences that speak of it.

use compact_str::CompactString;

use crate::conventions::built_in::{is_derivative, shown};
use crate::finding::Edit;
use crate::paper::View;

use crate::editing::kernels::{KernelName, KernelPlace, each_use, in_sentences, uses};

use super::assured::{Expected, reads_as_before};
use super::spelling::{kernel_name, spelled_kernel};
use super::{Edits, written_by_macro};

/// The edits that rename a kernel; `document` is that of the cursor.
pub(super) fn rename_kernel(view: &View, document: usize, kernel: &KernelName, to: &str) -> Result<Edits, String> {
    let name = kernel_name(to, view.host(document)).ok_or_else(|| format!("{to} is no name of a kernel"))?;
    if is_derivative(&name) || name == "d" {
        return Err(format!("{} differentiates", shown(&name)));
    }
    // Labels (`h^{TT}`) belong to the name and stay.
    let label = kernel.name.find(['^', '_']).and_then(|at| kernel.name.get(at..)).unwrap_or_default();
    let new = KernelName { name: CompactString::from_iter([name.as_str(), label]), slots: kernel.slots };
    if new == *kernel {
        return Ok(Vec::new());
    }
    let mut edits: Edits = Vec::new();
    for number in 0..view.len() {
        let places = kernel_places(view, number, kernel)?;
        if !uses(view, number, &new).is_empty() || in_sentences(view, number, &new).iter().any(|(place, _)| !place.bare)
        {
            return Err(format!("{} with {} is in use already", shown(&new.name), slots_in_words(new.slots)));
        }
        let (text, host) = (view.text(number), view.host(number));
        let edit = |place: &KernelPlace| Edit { span: place.span, text: spelled_kernel(&name, place.span, text, host) };
        let own: Vec<Edit> = places.iter().map(edit).collect();
        if !own.is_empty() {
            edits.push((number, own));
        }
    }
    declared_in_the_paper(view, document, kernel)?;
    if reads_as_before(view, &edits, &Expected::Kernel { from: kernel, to: &new }) {
        return Ok(edits);
    }
    Err(format!("the paper would be read in another way with {}", shown(&new.name)))
}

fn slots_in_words(slots: usize) -> String {
    match slots {
        0 => "no slots".to_owned(),
        1 => "one slot".to_owned(),
        _ => format!("{slots} slots"),
    }
}

/// Every place of a kernel in a document, if the author typed all of them and they mean no other kernel.
fn kernel_places(view: &View, document: usize, kernel: &KernelName) -> Result<Vec<KernelPlace>, String> {
    let text = view.text(document);
    let said = in_sentences(view, document, kernel).into_iter().map(|(place, _)| place);
    let mut places: Vec<KernelPlace> = uses(view, document, kernel).into_iter().chain(said).collect();
    places.sort_by_key(|place| place.span);
    places.dedup_by_key(|place| place.span);
    if let Some(call) = places.iter().find(|place| !place.typed) {
        return Err(written_by_macro(&kernel.name, call.span, text));
    }
    if places.iter().any(|place| place.bare) && other_slots(view, kernel) {
        let name = shown(&kernel.name);
        return Err(format!("a sentence names {name} without slots, and {name} stands with several numbers of slots"));
    }
    Ok(places)
}

/// Whether a kernel of the same name has other numbers of slots anywhere.
fn other_slots(view: &View, kernel: &KernelName) -> bool {
    let mut found = false;
    for number in 0..view.len() {
        each_use(view, number, |_, made| {
            found |= made.kernel == kernel.name && made.own_slots().count() != kernel.slots;
        });
    }
    found
}

/// A kernel that the configuration of the project declares cannot be renamed in the paper alone.
fn declared_in_the_paper(view: &View, document: usize, kernel: &KernelName) -> Result<(), String> {
    let known = view.declared(document).and_then(|declared| declared.meanings.known(&kernel.name, kernel.slots));
    let said = (0..view.len()).any(|number| in_sentences(view, number, kernel).iter().any(|(_, declares)| *declares));
    match known {
        Some(_) if !said => Err(format!("{} is declared outside of the paper", shown(&kernel.name))),
        _ => Ok(()),
    }
}
