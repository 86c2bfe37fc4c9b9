//! What ends a formula, and the names of environments.

/// Longest name of an environment.
pub(super) const LONGEST_NAME: usize = 100;

/// What ends a formula.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum Closer {
    /// `$`.
    Dollar,
    /// `$$`.
    Dollars,
    /// `\)`.
    Parenthesis,
    /// `\]`.
    Bracket,
    /// `\end{name}`, or the author's macro for it.
    Environment(String),
}

impl Closer {
    /// Whether the formula stands in a line of text and so never holds a blank line.
    pub(super) fn is_inline(&self) -> bool {
        matches!(self, Self::Dollar | Self::Parenthesis)
    }
}

/// `{name}` at a place: the name and one past the brace.
pub(super) fn environment_name(text: &str, at: usize) -> Option<(&str, usize)> {
    let rest = text.get(at..)?;
    let spaces = rest.bytes().take_while(|byte| *byte == b' ').take(LONGEST_NAME).count();
    let inside = rest.get(spaces..)?.strip_prefix('{')?;
    let ends = |byte: u8| matches!(byte, b'}' | b'{' | b'\\' | b'$' | b'%' | b'\n' | b'\r');
    let length = inside.bytes().take(LONGEST_NAME).position(ends)?;
    if inside.as_bytes().get(length) != Some(&b'}') {
        return None;
    }
    Some((inside.get(..length)?.trim(), at + spaces + length + 2))
}
