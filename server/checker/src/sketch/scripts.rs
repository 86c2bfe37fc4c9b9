//! Scripts of one factor: which of their letters may be indices, and what notation alone says of each.

use compact_str::{CompactString, format_compact};
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Factor, Item, ItemKind, Level, Script};

use crate::conventions::built_in::{
    LetterClass, bare_letter, class_of, is_basis_kernel, is_derivative, is_index_kernel, is_label_word,
    is_labelled_operator, is_point_kernel, is_usual_coordinate,
};

use super::builder::Builder;
use super::draft::Node;
use super::{Place, Shape, Stacked, Switch, Unit};

/// Who carries the scripts.
#[derive(Clone, Copy)]
pub(super) struct Carrier<'t> {
    /// The name with decorations; empty for a bracket.
    pub name: &'t str,
    /// The bare letter.
    pub letter: &'t str,
    pub bold: bool,
    pub group: bool,
}

/// What the scripts of a factor do to it.
#[derive(Default)]
pub(super) struct Scripts {
    /// Letters that may be indices.
    pub nodes: Vec<Node>,
    /// A square or another power stands on the factor.
    pub power: Option<Power>,
}

/// A power on a factor.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Power {
    Square,
    Other,
}

/// A letter of a script that may be an index.
struct Candidate<'t> {
    letter: CompactString,
    span: Span,
    script: &'t Script,
    /// How many letters stand in its script.
    company: usize,
    fixed: Option<i32>,
    parenthesised: bool,
    mixed: bool,
    after_number: bool,
    /// The lower letter of a point with an upper index (`x^i_a`): a particle's name or a frame's index.
    particle: bool,
    /// An m or n alone above a kernel that carries something below: it may be a power.
    exponent: bool,
}

/// Price of reading a word that is listed as a label as indices after all.
const WORD_AS_INDICES: i32 = 10;
/// Price of reading an unlisted word as a label.
const INDICES_AS_WORD: i32 = 30;

/// Signs beyond which a script is no list of indices.
const LONGEST_SCRIPT: usize = 256;

/// Reads the scripts of a factor.
pub(super) fn read_scripts(builder: &mut Builder, carrier: Carrier<'_>, scripts: &[Script], flip: bool) -> Scripts {
    let mut out = Scripts::default();
    let mut candidates: Vec<Candidate<'_>> = Vec::new();
    let mut exponents: Vec<Candidate<'_>> = Vec::new();
    let mut numbers = 0;
    for script in scripts.iter().filter(|script| !script.before) {
        if script.items.iter().any(|item| item.kind == ItemKind::Dots) {
            builder.sketch.unjudged = Some("an ellipsis stands in a script");
        }
        if script.items.len() > LONGEST_SCRIPT {
            builder.sketch.unjudged = Some("a script is too long");
            continue;
        }
        note_counters(builder, carrier, script);
        if let Some(power) = power_of(script, carrier, scripts) {
            out.power = Some(power);
        } else if is_exponential(script, carrier.name, scripts) {
            collect(builder, carrier, script, &mut exponents);
        } else if holds_indices(script) || lends(carrier, script) {
            numbers += plain_numbers(script);
            collect(builder, carrier, script, &mut candidates);
        }
    }
    if !exponents.is_empty() {
        // `e^{i\omega t}`, unless the letters are indices of a kernel e.
        let nodes = exponents.iter().map(|one| place(builder, carrier, one, exponents.len(), false, flip)).collect();
        let switch = builder.switch(Switch::new(false, WORD_AS_INDICES));
        out.nodes.push(Node::Switch(switch, Box::new(Node::Product(nodes))));
    }
    mark_particles(carrier, &mut candidates);
    note_stacked(builder, carrier, scripts, &candidates);
    note_form(builder, carrier, scripts, &candidates);
    let slots = candidates.iter().filter(|candidate| !candidate.parenthesised).count() + numbers;
    let components = candidates.iter().all(|c| is_usual_coordinate(&c.letter));
    let words = words(&candidates);
    let mut at = 0;
    while at < candidates.len() {
        let word = words.iter().find(|word| word.from == at);
        let length = word.map_or(1, |word| word.length);
        let nodes: Vec<Node> = candidates
            .iter()
            .skip(at)
            .take(length)
            .map(|candidate| place(builder, carrier, candidate, slots, components, flip))
            .collect();
        match word {
            Some(word) => {
                let (on, price) = if word.listed { (false, WORD_AS_INDICES) } else { (true, INDICES_AS_WORD) };
                let switch = builder.switch(Switch::new(on, price));
                out.nodes.push(Node::Switch(switch, Box::new(Node::Product(nodes))));
            }
            None => out.nodes.extend(nodes),
        }
        at += length;
    }
    out
}

/// Notes the letters of an arithmetic: `x^{k+1}` makes k a counter on this kernel, though it may run elsewhere.
fn note_counters(builder: &mut Builder, carrier: Carrier<'_>, script: &Script) {
    if holds_indices(script) {
        return;
    }
    let letters = script.items.iter().filter_map(|item| match &item.kind {
        ItemKind::Letter(letter) => Some((CompactString::from(carrier.name), letter.clone())),
        _ => None,
    });
    builder.counters.extend(letters);
}

/// A number above that is a power rather than a component: squares close, others are not judged.
fn power_of(script: &Script, carrier: Carrier<'_>, all: &[Script]) -> Option<Power> {
    if script.level == Level::Down {
        return None;
    }
    let lower_letters = all.iter().filter(|other| other.level == Level::Down).flat_map(|other| &other.items);
    let lower = lower_letters.filter(|item| matches!(item.kind, ItemKind::Letter(_))).count();
    match script.items.as_slice() {
        [Item { kind: ItemKind::Number(number), .. }] => match number.as_str() {
            "2" => Some(Power::Square),
            "0" | "1" => None,
            "3" if lower > 1 && !carrier.group => None,
            _ => Some(Power::Other),
        },
        // `a_i^{\nu_i}`: a quantity with a name of its own.
        [Item { kind: ItemKind::Factor(factor), .. }]
            if matches!(factor.atom, Atom::Kernel(_)) && !factor.scripts.is_empty() =>
        {
            Some(Power::Other)
        }
        // `x^{2n}`, `(..)^{2\alpha}`; nobody multiplies by 0 or 1, `S^{1j}`.
        [Item { kind: ItemKind::Number(number), .. }, Item { kind: ItemKind::Letter(_), .. }]
            if !matches!(number.as_str(), "0" | "1")
                && (carrier.group
                    || all.len() == 1 && !matches!(carrier.letter, "T" | "R" | "G" | "g" | "h" | "F")) =>
        {
            Some(Power::Other)
        }
        // An exponent with an arithmetic of its own: a scalar formula, a scope apart.
        items if items.iter().any(|item| is_arithmetic(&item.kind)) => Some(Power::Other),
        [Item { kind: ItemKind::Letter(letter), .. }]
            if carrier.group && matches!(letter.as_str(), "n" | "N" | "p" | "w") =>
        {
            Some(Power::Other)
        }
        _ => None,
    }
}

/// Numbers that are components; in brackets they are orders, `\rho_b^{(0)}`.
fn plain_numbers(script: &Script) -> usize {
    if matches!(script.items.first().map(|item| &item.kind), Some(ItemKind::Open(_))) {
        return 0;
    }
    script.items.iter().filter(|item| matches!(item.kind, ItemKind::Number(_))).count()
}

/// `e^{i\omega r}`: several letters above an e that carries nothing below.
pub(crate) fn is_exponential(script: &Script, kernel: &str, all: &[Script]) -> bool {
    let greek = |item: &Item| matches!(&item.kind, ItemKind::Letter(letter) if class_of(letter) == LetterClass::Greek);
    let above = kernel == "e" && script.level == Level::Up;
    above && all.len() == 1 && script.items.len() > 1 && !script.items.iter().all(greek)
}

fn is_arithmetic(kind: &ItemKind) -> bool {
    match kind {
        ItemKind::Sign(_) | ItemKind::Operator(_) => true,
        ItemKind::Factor(factor) => !matches!(factor.atom, Atom::Kernel(_) | Atom::Unknown(..) | Atom::Wrapped(_)),
        _ => false,
    }
}

/// Whether a script can hold indices: not a condition, not arithmetic.
fn holds_indices(script: &Script) -> bool {
    let operand = |at: Option<usize>| {
        let item = at.and_then(|at| script.items.get(at)).map(|item| &item.kind);
        matches!(item, Some(ItemKind::Letter(_) | ItemKind::Number(_) | ItemKind::Factor(_)))
    };
    // A sign with an operand on both sides is arithmetic; at the end or after a comma it names a polarisation.
    !script.items.iter().enumerate().any(|(at, item)| match item.kind {
        // `T^{<ij>}`: angle brackets typed as relations.
        ItemKind::Relation(_) => at > 0 && at + 1 < script.items.len() || script.items.len() == 1,
        ItemKind::Sign(_) | ItemKind::Operator(_) => operand(at.checked_sub(1)) && operand(Some(at + 1)),
        _ => false,
    })
}

/// `\nabla_{\partial/\partial x^\mu}`: arithmetic, but it lends its index.
fn lends(carrier: Carrier<'_>, script: &Script) -> bool {
    let relation = script.items.iter().any(|item| matches!(item.kind, ItemKind::Relation(_)));
    let factor = script.items.iter().any(|item| matches!(item.kind, ItemKind::Factor(_)));
    is_derivative(&kernel_key(carrier)) && script.level == Level::Down && factor && !relation
}

/// Gathers the letters of a script.
fn collect<'t>(builder: &mut Builder, carrier: Carrier<'_>, script: &'t Script, out: &mut Vec<Candidate<'t>>) {
    let items = &script.items;
    let inside = matches!(
        (items.first().map(|i| &i.kind), items.last().map(|i| &i.kind)),
        (Some(ItemKind::Open(_)), Some(ItemKind::Close(_)))
    );
    let letters = items.iter().filter(|item| matches!(item.kind, ItemKind::Letter(_))).count();
    let arithmetic = !holds_indices(script);
    let mixed = mixes_alphabets(script);
    for (n, item) in items.iter().enumerate() {
        let before = n.checked_sub(1).and_then(|n| items.get(n)).map(|item| &item.kind);
        let candidate = |letter: CompactString, fixed| Candidate {
            letter,
            span: item.span,
            script,
            company: letters,
            fixed,
            parenthesised: inside && letters == 1 || enclosed(items, n),
            mixed,
            after_number: matches!(before, Some(ItemKind::Number(number)) if number.as_str() > "3" || letters == 1 && lone_latin(&item.kind)),
            particle: false,
            exponent: script.level == Level::Up
                && items.len() == 1
                && matches!(&item.kind, ItemKind::Letter(l) if l == "n" || l == "m"),
        };
        match &item.kind {
            ItemKind::Letter(letter) if arithmetic || is_no_letter(letter) => {}
            ItemKind::Letter(letter) => out.push(candidate(letter.clone(), None)),
            ItemKind::Factor(factor) => {
                if let Some(letter) = lent(builder, carrier, script, item, factor) {
                    out.push(candidate(letter, None));
                }
            }
            _ => {}
        }
    }
}

/// A script that holds an indexed kernel lends its index (`\nabla_{e_\mu}`, `\partial_{x^i}`); a letter numbered by
/// a letter is a letter of its own; several factors after a letter are a swallowed product.
fn lent(
    builder: &mut Builder,
    carrier: Carrier<'_>,
    script: &Script,
    item: &Item,
    factor: &Factor,
) -> Option<CompactString> {
    let Atom::Kernel(kernel) = &factor.atom else { return None };
    let letters: Vec<&CompactString> = factor
        .scripts
        .iter()
        .flat_map(|script| &script.items)
        .filter_map(|item| if let ItemKind::Letter(letter) = &item.kind { Some(letter) } else { None })
        .collect();
    let derivative = is_derivative(&kernel_key(carrier));
    // `e^{i\omega_{nm}t}` swallows nothing.
    let exponential = carrier.name == "e" && script.level == Level::Up;
    if derivative && (script.items.len() == 1 || !holds_indices(script)) {
        return letters.first().filter(|_| letters.len() == 1).map(|letter| (*letter).clone());
    }
    if derivative || letters.len() > 1 || factor.scripts.iter().any(|script| script.level == Level::Up) {
        if !exponential {
            note_swallowed(builder, script, item);
        }
        return None;
    }
    letters.first().map(|letter| format_compact!("{}_{}", kernel.name, letter))
}

fn note_swallowed(builder: &mut Builder, script: &Script, item: &Item) {
    let known = builder.sketch.swallowed.last().is_some_and(|swallowed| swallowed.script == script.span);
    let first = script.items.first().map(|first| first.span).unwrap_or_default();
    if !known && first != item.span {
        let kept = Span { start: first.start, end: item.span.start };
        builder.sketch.swallowed.push(super::Swallowed { script: script.span, from: item.span, kept });
    }
}

/// A letter between brackets of its own: `T^{0,(\gamma)}`.
fn enclosed(items: &[Item], at: usize) -> bool {
    let kind = |at: Option<usize>| at.and_then(|at| items.get(at)).map(|item| &item.kind);
    matches!((kind(at.checked_sub(1)), kind(Some(at + 1))), (Some(ItemKind::Open('(')), Some(ItemKind::Close(')'))))
}

/// Greek and Latin letters in one script: more often a label than two families.
fn mixes_alphabets(script: &Script) -> bool {
    let classes = script.items.iter().filter_map(|item| match &item.kind {
        ItemKind::Letter(letter) => Some(class_of(letter) == LetterClass::Greek),
        _ => None,
    });
    let (greek, latin): (Vec<bool>, Vec<bool>) = classes.partition(|greek| *greek);
    !greek.is_empty() && !latin.is_empty()
}

/// Signs that are written like letters but name no index.
fn is_no_letter(letter: &str) -> bool {
    matches!(
        letter,
        "\\infty" | "\\partial" | "\\nabla" | "\\hbar" | "\\emptyset" | "\\varnothing" | "\\Box" | "\\forall"
    )
}

/// Latin letters past l after a number name something: `\Omega_{0m}`, but `T_{0i}`.
fn lone_latin(kind: &ItemKind) -> bool {
    matches!(kind, ItemKind::Letter(letter) if matches!(letter.as_bytes(), [b'm'..=b'z' | b'A'..=b'Z' | b'a'..=b'h']))
}

fn mark_particles(carrier: Carrier<'_>, candidates: &mut [Candidate<'_>]) {
    let point = is_point_kernel(carrier.letter) && carrier.letter != "\\eta" && carrier.letter != "\\omega";
    if let [one, two] = candidates
        && point
        && one.script.level != two.script.level
    {
        one.particle = one.script.level == Level::Down;
        two.particle = two.script.level == Level::Down;
    }
}

fn kernel_key(carrier: Carrier<'_>) -> CompactString {
    if carrier.name.starts_with("\\mathcal") { carrier.name.into() } else { carrier.letter.into() }
}

struct Word {
    from: usize,
    length: usize,
    listed: bool,
}

/// Runs of plain Latin letters that touch and may spell a word.
fn words(candidates: &[Candidate<'_>]) -> Vec<Word> {
    let mut out = Vec::new();
    let mut from = 0;
    while from < candidates.len() {
        let mut length = 1;
        let mut word = String::new();
        let latin = |c: &Candidate<'_>| c.letter.len() == 1 && c.letter.chars().all(|c| c.is_ascii_alphabetic());
        let Some(first) = candidates.get(from) else { break };
        if latin(first) {
            word.push_str(&first.letter);
            while let (Some(last), Some(next)) = (candidates.get(from + length - 1), candidates.get(from + length)) {
                if !latin(next) || next.script.span != last.script.span || next.span.start != last.span.end {
                    break;
                }
                word.push_str(&next.letter);
                length += 1;
            }
        }
        let in_family = |family: &str| word.chars().all(|c| family.contains(c));
        let listed = length > 1 && is_label_word(&word) && !in_family("abcdefgh") && !in_family("ijklmnpqrs");
        let first = word.chars().next();
        let repeated = length > 1 && word.chars().all(|c| c.is_ascii_uppercase() && Some(c) == first);
        let listed = listed || repeated;
        let odd = length > 2 && word.chars().any(|c| matches!(c, 'o' | 't'..='z'));
        if listed || odd {
            out.push(Word { from, length, listed });
        }
        from += length;
    }
    out
}

fn place(
    builder: &mut Builder,
    carrier: Carrier<'_>,
    candidate: &Candidate<'_>,
    slots: usize,
    components: bool,
    flip: bool,
) -> Node {
    let written = candidate.script.level;
    let shape = match (carrier.group, slots) {
        _ if candidate.parenthesised => Shape::Bracketed,
        _ if candidate.particle => Shape::Particle,
        (true, 0 | 1) => Shape::OnGroup,
        (_, 0 | 1) => Shape::Lone,
        _ => Shape::Several,
    };
    let bias = candidate.fixed.unwrap_or_else(|| bias(carrier, candidate, shape, components));
    let unit = builder.unit(Unit {
        kernel: carrier.name.into(),
        kernel_letter: carrier.letter.into(),
        letter: candidate.letter.clone(),
        class: class_of(&candidate.letter),
        coordinate: is_usual_coordinate(&candidate.letter),
        level: written,
        shape,
        mirrored: false,
        counter: false,
        vector: carrier.bold,
        bias,
    });
    builder.sketch.places.push(Place {
        letter: candidate.letter.clone(),
        number: 0,
        level: if flip { written.flipped() } else { written },
        written,
        span: candidate.span,
        script: candidate.script.span,
        company: u16::try_from(candidate.company).unwrap_or(u16::MAX),
        form: u16::try_from(builder.sketch.forms.len().saturating_sub(1)).unwrap_or(u16::MAX),
        unit,
    });
    Node::Place(u32::try_from(builder.sketch.places.len() - 1).unwrap_or(u32::MAX))
}

/// What notation alone says of a letter, in tenths of a unit of price. Set by measurement on real documents: what
/// matters is the order (several letters over a derivative's over a lone Greek over a lone Latin over a capital)
/// and that two lone late Latin letters together pass the margin of `reading.rs`.
fn bias(carrier: Carrier<'_>, candidate: &Candidate<'_>, shape: Shape, components: bool) -> i32 {
    let class = class_of(&candidate.letter);
    let bare = bare_letter(&candidate.letter);
    let lie = carrier.name.starts_with('\\') && carrier.name.ends_with('L') || carrier.name == "\\pounds";
    if is_labelled_operator(carrier.name) && (lie || shape == Shape::Lone) {
        return if lie { -90 } else { -22 };
    }
    if is_usual_coordinate(&candidate.letter) {
        return if components || shape != Shape::Several { -25 } else { -8 };
    }
    if candidate.parenthesised {
        return 2;
    }

    let up = candidate.script.level == Level::Up;
    let base = match (shape, class) {
        // Spherical harmonics.
        (Shape::Several, _) if harmonic(carrier, candidate.script) => 12,
        (Shape::Several, LetterClass::Capital) => 30,
        (Shape::Several, LetterClass::Other) => 10,
        (Shape::Several, _) if candidate.exponent => 20,
        (Shape::Several, LetterClass::Greek) => 55,
        (Shape::Several, LetterClass::LatinLate) if matches!(bare, "i" | "j" | "k" | "l" | "m" | "n") => 45,
        (Shape::Several, LetterClass::LatinEarly) => 36,
        (Shape::Several, _) => 25,
        (Shape::Bracketed, _) => 2,
        (Shape::Particle, _) => 15,
        (Shape::OnGroup, LetterClass::Capital | LetterClass::Other) => -20,
        (Shape::OnGroup, _) => 10,
        (Shape::Lone, LetterClass::Greek) => {
            if !up {
                18
            } else if is_constant(carrier.letter) {
                12
            } else {
                30
            }
        }
        (Shape::Lone, LetterClass::LatinEarly) => 10,
        (Shape::Lone, LetterClass::LatinLate) => match bare {
            "i" | "j" => 25,
            "k" | "l" => 21,
            "m" | "n" => {
                if up {
                    6
                } else {
                    12
                }
            }
            _ => 4,
        },
        (Shape::Lone, LetterClass::Capital) => {
            if up && bare == "T" {
                -50
            } else {
                -12
            }
        }
        (Shape::Lone, LetterClass::Other) => -20,
    };
    let by_number = if candidate.after_number || candidate.mixed {
        -40
    } else if shape == Shape::Lone && candidate.letter.contains('_') {
        -12
    } else if candidate.letter.contains("tilde") {
        -50
    } else {
        0
    };
    let by_kernel = if is_derivative(&kernel_key(carrier)) {
        if class == LetterClass::Capital { 10 } else { 30 }
    } else if shape == Shape::Several && is_index_kernel(carrier.letter) {
        20
    } else if carrier.bold && shape == Shape::Lone && !is_basis_kernel(carrier.letter) {
        -30
    } else {
        0
    };
    base + by_kernel + by_number
}

/// Quantities whose superscript is a power.
fn is_constant(letter: &str) -> bool {
    matches!(letter, "c" | "\\hbar" | "G" | "m" | "M" | "e" | "a" | "\\pi" | "H" | "T" | "E" | "L")
}

/// `Y_{\ell m}`, `a_{lm}`.
fn harmonic(carrier: Carrier<'_>, script: &Script) -> bool {
    if !matches!(
        carrier.letter,
        "Y" | "a" | "\\Psi" | "\\psi" | "\\Phi" | "\\phi" | "S" | "C" | "c" | "Z" | "X" | "W" | "u" | "v"
    ) {
        return false;
    }
    let letters: Vec<&str> = script
        .items
        .iter()
        .filter_map(|item| if let ItemKind::Letter(letter) = &item.kind { Some(letter.as_str()) } else { None })
        .collect();
    matches!(letters.as_slice(), ["\\ell" | "l", "m"] | ["n", "\\ell" | "l", "m"])
}

/// How many letters and numbers a kernel carries above and below.
fn note_form(builder: &mut Builder, carrier: Carrier<'_>, scripts: &[Script], candidates: &[Candidate<'_>]) {
    if candidates.is_empty() {
        return;
    }
    let slots = |level: Level| {
        // What follows a comma or a semicolon is a derivative's.
        let own = |script: &'_ Script| {
            script.items.iter().take_while(|item| !matches!(item.kind, ItemKind::Comma | ItemKind::Semicolon)).count()
        };
        let mine = scripts
            .iter()
            .filter(|script| script.level == level && !script.before)
            .flat_map(|script| script.items.iter().take(own(script)));
        let count = mine.filter(|item| matches!(item.kind, ItemKind::Letter(_) | ItemKind::Number(_))).count();
        u8::try_from(count).unwrap_or(u8::MAX)
    };
    builder.sketch.forms.push((carrier.name.into(), slots(Level::Up), slots(Level::Down)));
}

fn note_stacked(builder: &mut Builder, carrier: Carrier<'_>, scripts: &[Script], candidates: &[Candidate<'_>]) {
    let letters = |level: Level| candidates.iter().filter(|c| c.script.level == level).count();
    let (up, down) = (letters(Level::Up), letters(Level::Down));
    let (Some(first), Some(second)) =
        (candidates.first(), candidates.iter().find(|c| c.script.level != first_level(candidates)))
    else {
        return;
    };
    if up == 0 || down == 0 || carrier.group {
        return;
    }
    builder.sketch.stacked.push(Stacked {
        kernel: (carrier.name.into(), u8::try_from(up).unwrap_or(9), u8::try_from(down).unwrap_or(9)),
        span: first.script.span.join(second.script.span),
        second: second.script.span,
        staggered: scripts.iter().any(|script| script.staggered),
    });
}

fn first_level(candidates: &[Candidate<'_>]) -> Level {
    candidates.first().map_or(Level::Up, |candidate| candidate.script.level)
}
