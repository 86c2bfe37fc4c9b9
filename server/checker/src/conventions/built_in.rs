//! The trade's habits: letters that are indices by custom, coordinates, words that are labels, kernels with a
//! meaning of their own. All common practice, no source. A document may speak against every one of them.

/// Class of letters that are used alike: the level habit of a document is counted per class.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum LetterClass {
    /// Greek lower case.
    Greek,
    /// Latin a to h.
    LatinEarly,
    /// Latin i and the letters after.
    LatinLate,
    /// Latin capitals.
    Capital,
    /// Anything else.
    #[default]
    Other,
}

/// All classes, for tables indexed by class.
pub const CLASSES: [LetterClass; 5] =
    [LetterClass::Greek, LetterClass::LatinEarly, LetterClass::LatinLate, LetterClass::Capital, LetterClass::Other];

/// The letter without accents, primes and numbers: `\mu` of `\dot \mu'` or `\mu_1`.
pub fn bare_letter(letter: &str) -> &str {
    let letter = letter.rsplit(' ').next().unwrap_or(letter);
    let end = letter.find(['\'', '_', '’', '′']).unwrap_or(letter.len());
    letter.get(..end).unwrap_or(letter)
}

/// A letter as people read it: `μ` for `\mu`, `μ'` for `\mu'`.
pub fn shown(letter: &str) -> String {
    let bare = bare_letter(letter);
    match indexwise_grammar::unicode_sign(bare) {
        Some(sign) => letter.replace(bare, sign),
        None => letter.to_owned(),
    }
}

/// The class of an index letter.
pub fn class_of(letter: &str) -> LetterClass {
    let bare = bare_letter(letter);
    let mut signs = bare.chars();
    match (signs.next(), signs.next()) {
        (Some('\\'), Some(_)) if bare == "\\ell" => LetterClass::LatinLate,
        (Some('\\'), Some(first)) if first.is_ascii_lowercase() => LetterClass::Greek,
        (Some('a'..='h'), None) => LetterClass::LatinEarly,
        (Some('i'..='z'), None) => LetterClass::LatinLate,
        (Some('A'..='Z'), None) => LetterClass::Capital,
        _ => LetterClass::Other,
    }
}

/// Letters that usually name a coordinate.
pub fn is_usual_coordinate(letter: &str) -> bool {
    matches!(
        bare_letter(letter),
        "t" | "r"
            | "x"
            | "y"
            | "z"
            | "\\theta"
            | "\\phi"
            | "\\varphi"
            | "\\vartheta"
            | "T"
            | "X"
            | "Y"
            | "Z"
            | "u"
            | "v"
            | "w"
    )
}

/// Kernels that name a point of space or momentum: an argument that begins with one is a function's argument.
pub fn is_point_kernel(letter: &str) -> bool {
    matches!(
        letter,
        "x" | "y"
            | "z"
            | "p"
            | "q"
            | "k"
            | "X"
            | "Y"
            | "r"
            | "\\xi"
            | "t"
            | "s"
            | "\\lambda"
            | "\\tau"
            | "\\sigma"
            | "\\omega"
            | "\\theta"
            | "\\phi"
            | "\\varphi"
            | "\\eta"
            | "u"
            | "v"
            | "l"
    )
}

/// Derivative kernels, whose script is an index or a coordinate.
pub fn is_derivative(letter: &str) -> bool {
    matches!(letter, "\\partial" | "\\nabla" | "D" | "\\mathcal D" | "\\mathrm D")
}

/// Kernels whose scripts are labels: the Lie derivative, the wave operator, the Laplacian.
pub fn is_labelled_operator(name: &str) -> bool {
    matches!(
        name,
        "\\mathcal L"
            | "\\mathscr L"
            | "\\cal L"
            | "\\pounds"
            | "\\Box"
            | "\\square"
            | "\\Delta"
            | "\\dAlembert"
            | "\\mathfrak L"
    )
}

/// Kernels that carry indices whenever they carry two or more scripts.
pub fn is_index_kernel(letter: &str) -> bool {
    matches!(letter, "\\Gamma" | "g" | "\\eta" | "\\delta" | "\\epsilon" | "\\varepsilon" | "R" | "T" | "h" | "\\gamma")
}

/// Kronecker and epsilon symbols: their levels are often ignored.
pub fn is_symbol_kernel(letter: &str) -> bool {
    matches!(letter, "\\delta" | "\\epsilon" | "\\varepsilon")
}

/// Kernels that are metrics without being declared; a decoration makes another metric of the same kind.
pub fn is_metric_by_custom(kernel: &str) -> bool {
    let letter = kernel.rsplit(' ').next().unwrap_or(kernel);
    matches!(letter, "g" | "\\eta" | "\\delta")
}

/// Metrics by custom whose components are constant.
pub fn is_constant_metric(kernel: &str) -> bool {
    matches!(kernel, "\\eta" | "\\delta")
}

/// Basis vectors: bold, yet their script is an index.
pub fn is_basis_kernel(letter: &str) -> bool {
    matches!(
        letter,
        "e" | "v"
            | "g"
            | "E"
            | "b"
            | "i"
            | "n"
            | "\\theta"
            | "\\omega"
            | "\\partial"
            | "\\sigma"
            | "\\gamma"
            | "\\epsilon"
    )
}

/// Letters in a script that together are a word, hence a label: `T_{eff}`, `p_{max}`.
pub fn is_label_word(word: &str) -> bool {
    const WORDS: &[&str] = &[
        "eff", "max", "min", "tot", "total", "in", "out", "int", "ext", "eq", "crit", "cr", "rel", "obs", "ref", "rad",
        "mat", "dec", "rec", "ini", "init", "fin", "end", "gas", "vac", "em", "gw", "bh", "ns", "sun", "ph", "kin",
        "pot", "grav", "rms", "avg", "av", "ave", "sat", "ss", "bulk", "surf", "wall", "edge", "top", "bot", "left",
        "right", "old", "new", "true", "est", "fit", "mod", "num", "det", "sig", "bg", "bkg", "cm", "lab", "cut",
        "mid", "thr", "th", "thermal", "elec", "mag", "nuc", "star", "disk", "halo", "gal", "host", "atm", "sea",
        "ice", "air", "dry", "wet", "visc", "turb", "lam", "mol", "free", "fix", "opt", "best", "ideal", "real",
        "phys", "bare", "ren", "reg", "sub", "sup", "sup", "sys", "env", "coll", "chem", "dyn", "stat", "orb", "rot",
        "spin", "esc", "vir", "merg", "isco", "peak", "eV", "pl", "Pl", "mat", "conf", "prop", "phot", "bar", "dm",
        "de", "cdm", "cmb", "nl", "loc", "glob", "inj", "abs", "abs", "emit", "rec", "em", "obs", "src", "det",
        "noise", "inst", "iso", "adi", "ad", "ent", "inf", "reh", "kick", "sound", "light", "Newt", "red", "blue",
        "dS", "AdS", "ADM", "BH", "TT", "GW", "EM", "NS", "CMB", "FRW", "GR", "SR", "CM", "LT", "PN", "YM", "EH", "MC",
        "QCD", "RN", "FP", "WKB", "KG", "dom", "exp", "aff", "ave", "hor", "ergo", "std", "lin", "quad", "sph", "cyl",
        "pol", "tor", "per", "par", "mean", "load", "ep", "el", "plast", "pre", "post", "norm", "tan",
    ];
    WORDS.contains(&word)
}
