//! The forms of sentences, as they are shown to people, and the form that a misspelt sentence is nearest to.
//!
//! `FORMS` is the one list: completion, messages and the table of the README come from it, and a test reads every
//! example. Capitals stand for what the author puts there.

/// One form of sentence.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Form {
    /// As shown to people: `LETTERS run from NUMBER to NUMBER`.
    pub form: &'static str,
    /// What it says, in a line.
    pub meaning: &'static str,
    /// An example in LaTeX's spelling.
    pub example: &'static str,
    /// The example as it is spelt in a note, where that differs.
    pub example_note: Option<&'static str>,
}

const fn form(form: &'static str, example: &'static str, meaning: &'static str) -> Form {
    Form { form, meaning, example, example_note: None }
}

const fn in_notes(form: Form, example: &'static str) -> Form {
    Form { example_note: Some(example), ..form }
}

/// All forms. Where two are equally near to a misspelt sentence, the first is shown.
pub const FORMS: &[Form] = &[
    form(
        "LETTERS run from NUMBER to NUMBER",
        "i j k l m n run from 1 to 3",
        "These letters are indices of one family, with this range; both ends belong to it",
    ),
    form(
        "LETTERS run from NUMBER to LETTER",
        "p q run from 0 to n-1",
        "The range ends at a letter, or at a letter less a number",
    ),
    form(
        "LETTERS range over NUMBER dimensions",
        "a b c d range over 4 dimensions",
        "A family whose range has a size but no names for its members; the size may be a letter",
    ),
    in_notes(
        form(
            "LETTERS run over LETTERS",
            "\\mu \\nu \\rho \\sigma run over t r \\theta \\phi",
            "A family whose members have names",
        ),
        "mu nu rho sigma run over t r theta phi",
    ),
    form("LETTER is the dimension", "n is the dimension", "The letter stands for the dimension, in formulas too"),
    form(
        "LETTER is the dimension of LETTERS",
        "D is the dimension of a b c",
        "The letter stands for the dimension of this family",
    ),
    form("LETTERS are cartesian", "i j k are cartesian", "Levels do not matter: a pair may stand on one level"),
    in_notes(
        form(
            "LETTERS are the spatial part of LETTERS",
            "i j k are the spatial part of \\mu \\nu",
            "The family is a part of another one, without its first member",
        ),
        "i j k are the spatial part of mu nu",
    ),
    form("LETTERS are frame indices", "A B are frame indices", "A family of a frame"),
    in_notes(
        form(
            "LETTERS are frame indices raised by KERNEL",
            "A B are frame indices raised by \\eta",
            "A family of a frame that has a metric of its own",
        ),
        "A B are frame indices raised by eta",
    ),
    in_notes(
        form(
            "TENSOR is the metric",
            "g_{ij} is the metric",
            "Symmetric, with its inverse and its determinant; raises and lowers the indices of its family",
        ),
        "g_ij is the metric",
    ),
    in_notes(
        form(
            "TENSOR is the metric, constant, signature SIGNS",
            "\\eta_{ab} is the metric, constant, signature - + + +",
            "A metric with constant components, or of a signature",
        ),
        "eta_ab is the metric, constant, signature -+++",
    ),
    form(
        "KERNEL raises KERNELS",
        "\\tilde g raises \\tilde A \\tilde B",
        "The indices of these kernels are moved by this metric",
    ),
    form("TENSOR are the coordinates", "x^i are the coordinates", "The coordinates as functions of the point"),
    in_notes(
        form(
            "LETTERS are the coordinates",
            "t r \\theta \\phi are the coordinates",
            "In a script these letters name components and are not summed",
        ),
        "t r theta phi are the coordinates",
    ),
    form("LETTER is a coordinate", "r is a coordinate", "In a script the letter names a component and is not summed"),
    form("LETTER is a label", "B is a label", "The letter is no index, wherever it stands in a script"),
    in_notes(
        form(
            "TENSOR is the Christoffel symbol of KERNEL",
            "\\Gamma^i_{jk} is the Christoffel symbol of g",
            "The connection of this metric; without `of`, of the metric in force",
        ),
        "Gamma^i_jk is the Christoffel symbol of g",
    ),
    in_notes(
        form(
            "KERNEL is the covariant derivative of KERNEL",
            "D is the covariant derivative of \\gamma",
            "The derivative that this metric is constant under; without `of`, the metric in force",
        ),
        "D is the covariant derivative of gamma",
    ),
    in_notes(
        form("TENSOR is symmetric", "T_{ij} is symmetric", "An exchange of two slots changes nothing"),
        "T_ij is symmetric",
    ),
    in_notes(
        form("TENSOR is antisymmetric", "F_{ij} is antisymmetric", "An exchange of two slots changes the sign"),
        "F_ij is antisymmetric",
    ),
    in_notes(
        form("TENSOR is symmetric in LETTERS", "S_{ijk} is symmetric in i j", "Symmetric in these slots only"),
        "S_ijk is symmetric in i j",
    ),
    in_notes(
        form(
            "TENSOR is antisymmetric in LETTERS",
            "S_{ijk} is antisymmetric in i j",
            "Antisymmetric in these slots only",
        ),
        "S_ijk is antisymmetric in i j",
    ),
    in_notes(
        form("TENSOR is traceless", "h_{ij} is traceless", "A contraction of two of its slots vanishes"),
        "h_ij is traceless",
    ),
    in_notes(
        form(
            "TENSOR is the Riemann tensor of KERNEL",
            "R_{ijkl} is the Riemann tensor of g",
            "The curvature of this metric; without `of`, of the metric in force",
        ),
        "R_ijkl is the Riemann tensor of g",
    ),
    in_notes(
        form("TENSOR is the Ricci tensor of KERNEL", "R_{ij} is the Ricci tensor of g", "Its first trace"),
        "R_ij is the Ricci tensor of g",
    ),
    form("KERNEL is the scalar curvature of KERNEL", "R is the scalar curvature of g", "Its second trace"),
    in_notes(
        form(
            "TENSOR is the Einstein tensor of KERNEL",
            "G_{ij} is the Einstein tensor of g",
            "The Ricci tensor less half its trace",
        ),
        "G_ij is the Einstein tensor of g",
    ),
    in_notes(
        form(
            "TENSOR is the Weyl tensor of KERNEL",
            "C_{ijkl} is the Weyl tensor of g",
            "The curvature without its traces",
        ),
        "C_ijkl is the Weyl tensor of g",
    ),
    in_notes(
        form(
            "TENSOR := FORMULA",
            "R_{jl} := \\partial_k \\Gamma^k_{jl} - \\Gamma^k_{lm} \\Gamma^m_{jk}",
            "A definition: the left side is new, the right side says what it is",
        ),
        "R_jl := ∂_k Gamma^k_jl - Gamma^k_lm Gamma^m_jk",
    ),
    in_notes(
        form("TENSOR is a tensor", "T^{ij} is a tensor", "A field with these slots, of which nothing else is assumed"),
        "T^ij is a tensor",
    ),
    in_notes(
        form(
            "KERNEL is a symbol",
            "\\epsilon is a symbol",
            "The epsilon has the components 0, 1 and -1; as `a tensor` it takes the root of the determinant with it",
        ),
        "epsilon is a symbol",
    ),
    in_notes(form("KERNEL is a scalar", "\\phi is a scalar", "A field without indices"), "phi is a scalar"),
    in_notes(
        form(
            "TENSORS are vectors",
            "V^i \\omega_j are vectors",
            "Fields with one index, of which nothing else is assumed",
        ),
        "V^i omega_j are vectors",
    ),
    form("TENSOR is constant", "m is constant", "Does not depend on the place"),
    form("TENSOR is small", "h is small", "Of first order: products of small kernels are dropped"),
    form(
        "KERNELS are matrices",
        "A B are matrices",
        "Written without indices; determinant, trace, inverse and transpose apply",
    ),
    in_notes(
        form("KERNEL does not commute", "\\gamma does not commute", "Its factors keep their order"),
        "gamma does not commute",
    ),
    in_notes(
        form("KERNEL is a variation", "\\delta is a variation", "A derivation that partial derivatives commute with"),
        "delta is a variation",
    ),
    form("MARK is a derivative", "dot is a derivative", "A dot or a prime is a derivation along a parameter"),
    form("derivations are checked", "derivations are checked", "Every chain in this file is a claim to verify"),
    form("check this", "check this", "The formula after the sentence is a claim to verify"),
    form("check this step by step", "check this step by step", "As `check this`: each relation by itself"),
    form(
        "check this using REFERENCES",
        "check this using (eq:gamma), (eq:compat)",
        "As `check this`, with the formulas of these labels given",
    ),
    form("skip this", "skip this", "The formula after the sentence is not judged"),
    form("allow RULE here", "allow dummy-levels here", "The rule is silent for the formula after the sentence"),
    form("allow RULE in this file", "allow dummy-levels in this file", "The rule is silent in the whole file"),
];

/// Words that mean the same; the first is the one that a form uses, or stands for all.
const SAME: &[&[&str]] = &[
    &["is", "are"],
    &["run", "range", "runs", "ranges"],
    &["raises", "raise"],
    &["does", "do"],
    &["the", "a", "an"],
    &["label", "labels"],
    &["coordinates", "coordinate"],
    &["symbol", "symbols"],
    &["tensor", "tensors"],
    &["scalar", "scalars"],
    &["vectors", "vector"],
    &["constant", "constants"],
    &["matrices", "matrix"],
    &["variation", "variations"],
    &["derivative", "derivatives"],
    &["dimensions", "dimension"],
    &["indices", "index"],
    &["prime", "dot"],
];

/// Words of a sentence that are compared with the forms; what comes later tells little.
const WORDS_COMPARED: usize = 40;
/// Letters of the longest word that is compared letter by letter.
const LETTERS_COMPARED: usize = 20;
/// What a word that carries the meaning counts beside one that does not.
const WEIGHT: i32 = 4;

/// The form that a sentence is nearest to: the one that shares most words with it and wants fewest others, the first
/// of several. Words that every sentence has (`is`, `the`, `of`) make no form near by themselves.
pub(super) fn nearest_form(text: &str) -> Option<&'static Form> {
    let words: Vec<String> = text
        .split(|letter: char| letter.is_whitespace() || ",.$;".contains(letter))
        .filter(|word| !word.is_empty())
        .take(WORDS_COMPARED)
        .map(str::to_lowercase)
        .collect();
    let meant: Vec<&str> = words.iter().filter_map(|word| canonical(word).or_else(|| corrected(word))).collect();
    let score = |form: &'static Form| {
        let worth = |word: &str| match (meant.contains(&word), carries_meaning(word)) {
            (true, true) => WEIGHT,
            (true, false) => 1,
            (false, true) => -1,
            (false, false) => 0,
        };
        form_words(form).map(worth).sum::<i32>()
    };
    let shares = |form: &&Form| form_words(form).any(|word| carries_meaning(word) && meant.contains(&word));
    // Of equal scores the last is taken: from the end, that is the first form.
    let near = FORMS.iter().rev().filter(shares).max_by_key(|form| score(form));
    // `from` and `to` speak of a range, whatever the verb.
    let range = || ["from", "to"].iter().all(|word| words.iter().any(|one| one == word));
    near.or_else(|| FORMS.first().filter(|_| range()))
}

/// The words of a form that stand for themselves, each as the first of those that mean the same.
fn form_words(form: &Form) -> impl Iterator<Item = &'static str> {
    let own = |word: &&str| !word.starts_with(|letter: char| letter.is_ascii_uppercase()) || !is_capitals(word);
    form.form.split([' ', ',']).filter(|word| !word.is_empty()).filter(own).map(first_of_same)
}

fn is_capitals(word: &str) -> bool {
    word.chars().all(|letter| letter.is_ascii_uppercase())
}

fn carries_meaning(word: &str) -> bool {
    !matches!(word, "is" | "the" | "of" | "to" | "in" | "by" | "this" | "not" | "does" | "from" | "over")
}

/// All words of the language in lower case, each with the one that stands for it.
fn vocabulary() -> impl Iterator<Item = (&'static str, &'static str)> {
    let same = SAME.iter().flat_map(|same| same.iter().map(|word| (*word, same.first().copied().unwrap_or(word))));
    same.chain(FORMS.iter().flat_map(form_words).map(|word| (word, word)))
}

fn first_of_same(word: &'static str) -> &'static str {
    SAME.iter().find(|same| same.contains(&word)).and_then(|same| same.first().copied()).unwrap_or(word)
}

/// The word that stands for a word of the language.
pub(super) fn canonical(word: &str) -> Option<&'static str> {
    vocabulary().find(|(known, _)| known.eq_ignore_ascii_case(word)).map(|(_, meant)| meant)
}

/// The word of the language that a misspelt word is nearest to, if it is near.
fn corrected(word: &str) -> Option<&'static str> {
    let letters: Vec<char> = word.chars().take(LETTERS_COMPARED + 1).collect();
    let slips = match letters.len() {
        5..=6 => 1,
        7..=LETTERS_COMPARED => 2,
        _ => return None,
    };
    let near = |known: &str| known.len() > 3 && known.len().abs_diff(letters.len()) <= slips;
    let distances = vocabulary().filter(|(known, _)| near(known)).map(|(known, meant)| {
        let known: Vec<char> = known.to_lowercase().chars().collect();
        (distance(&letters, &known), meant)
    });
    distances.min_by_key(|(distance, _)| *distance).filter(|(distance, _)| *distance <= slips).map(|(_, meant)| meant)
}

/// How many letters have to be put in, taken out, changed or exchanged with their neighbour to make one word of the
/// other (optimal string alignment; Damerau 1964 for the four slips).
fn distance(one: &[char], other: &[char]) -> usize {
    let mut before: Vec<usize> = Vec::new();
    let mut above: Vec<usize> = (0..=other.len()).collect();
    for (row, letter) in one.iter().enumerate() {
        let mut line = vec![row + 1];
        for (column, against) in other.iter().enumerate() {
            let at = |line: &[usize], column: usize| line.get(column).copied().unwrap_or(usize::MAX - 1);
            let changed = at(&above, column) + usize::from(letter != against);
            let mut best = changed.min(at(&above, column + 1) + 1).min(at(&line, column) + 1);
            let exchanged = row > 0 && column > 0 && one.get(row - 1) == Some(against);
            if exchanged && other.get(column - 1) == Some(letter) {
                best = best.min(at(&before, column - 1) + 1);
            }
            line.push(best);
        }
        before = above;
        above = line;
    }
    above.last().copied().unwrap_or(one.len())
}
