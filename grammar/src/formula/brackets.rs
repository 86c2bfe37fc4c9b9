//! Brackets find their partners before anything is parsed.
//!
//! Round, square, curly and angle brackets match within one level of braces, whatever their shapes, since
//! `[0, 1)` is as good as `(0, 1)`. Bars match where an even number of them stands in one stretch. What has no
//! partner becomes `Lone` and binds nothing. So the parsers need no second try, and a missing bracket spoils
//! nothing but itself.

use super::lexeme::{Kind, Lexeme};

/// Nesting of braces, brackets and prefix commands beyond which a formula is not read.
pub(crate) const DEPTH_BUDGET: usize = 48;

/// Matches brackets in place. False if the nesting passes its budget.
pub(crate) fn match_brackets(lexemes: &mut [Lexeme]) -> bool {
    let mut levels = vec![Level::default()];
    let mut prefixes = 0;
    let mut deepest = 0;
    let mut open_now = 0_usize;
    for at in 0..lexemes.len() {
        let Some(kind) = lexemes.get(at).map(|lexeme| lexeme.kind) else { break };
        prefixes = if is_prefix(kind) { prefixes + 1 } else { 0 };
        match kind {
            Kind::BraceOpen => {
                levels.push(Level::default());
                open_now += 1;
            }
            Kind::BraceClose if levels.len() > 1 => {
                if let Some(level) = levels.pop() {
                    open_now = open_now.saturating_sub(1 + level.open.len());
                    level.end(lexemes);
                }
            }
            Kind::BraceClose => set(lexemes, at, Kind::Lone),
            Kind::Open => {
                open_now += 1;
                if let Some(level) = levels.last_mut() {
                    level.open.push((at, std::mem::take(&mut level.bars)));
                }
            }
            Kind::Close => match levels.last_mut().and_then(|level| level.open.pop().map(|open| (level, open))) {
                Some((level, (_, outer_bars))) => {
                    open_now = open_now.saturating_sub(1);
                    let bars = std::mem::replace(&mut level.bars, outer_bars);
                    pair_bars(&bars, lexemes);
                }
                None => set(lexemes, at, Kind::Lone),
            },
            Kind::Bar if lexemes.get(at).is_some_and(|l| l.text != "eval") => {
                if let Some(level) = levels.last_mut() {
                    level.bars.push(at);
                }
            }
            Kind::Row | Kind::Separator | Kind::Comma | Kind::Text | Kind::Equal | Kind::Loose | Kind::Arrow => {
                if let Some(level) = levels.last_mut() {
                    let bars = std::mem::take(&mut level.bars);
                    pair_bars(&bars, lexemes);
                }
            }
            _ => {}
        }
        deepest = deepest.max(open_now + prefixes);
    }
    let unclosed: Vec<usize> = unclosed_braces(lexemes);
    while let Some(level) = levels.pop() {
        level.end(lexemes);
    }
    for at in unclosed {
        set(lexemes, at, Kind::Lone);
    }
    deepest <= DEPTH_BUDGET
}

#[derive(Default)]
struct Level {
    /// Open brackets, each with the bars of the stretch outside.
    open: Vec<(usize, Vec<usize>)>,
    /// Bars of the present stretch.
    bars: Vec<usize>,
}

impl Level {
    fn end(self, lexemes: &mut [Lexeme]) {
        pair_bars(&self.bars, lexemes);
        for (at, bars) in self.open {
            set(lexemes, at, Kind::Lone);
            pair_bars(&bars, lexemes);
        }
    }
}

fn unclosed_braces(lexemes: &[Lexeme]) -> Vec<usize> {
    let mut open = Vec::new();
    for (at, lexeme) in lexemes.iter().enumerate() {
        match lexeme.kind {
            Kind::BraceOpen => open.push(at),
            Kind::BraceClose => {
                open.pop();
            }
            _ => {}
        }
    }
    open
}

fn set(lexemes: &mut [Lexeme], at: usize, kind: Kind) {
    if let Some(lexeme) = lexemes.get_mut(at) {
        lexeme.kind = kind;
    }
}

/// Bars of one stretch pair up in order. One that a script follows opens nothing: it evaluates, or differentiates
/// (`m^{\alpha\beta}|_\beta`). The last of an odd number stays lone.
fn pair_bars(bars: &[usize], lexemes: &mut [Lexeme]) {
    let mut open: Option<usize> = None;
    for at in bars {
        let script = lexemes.get(at + 1).is_some_and(|next| matches!(next.kind, Kind::Down | Kind::Up));
        match open.take() {
            None if !script => open = Some(*at),
            None => {}
            Some(first) => {
                set(lexemes, first, Kind::Open);
                set(lexemes, *at, Kind::Close);
            }
        }
    }
}

/// Commands that take the next lexeme as their argument, so that a row of them nests.
fn is_prefix(kind: Kind) -> bool {
    use Kind::*;
    matches!(
        kind,
        Accent
            | Bold
            | Roman
            | Root
            | Fraction
            | Wrap
            | Brace
            | Norm
            | Average
            | Pair
            | Derivative
            | Differential
            | Slashed
            | Order
            | Tensor
            | Up
            | Down
            | Unknown
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::span::Span;

    fn shape(signs: &str) -> String {
        let mut lexemes: Vec<Lexeme> = signs
            .char_indices()
            .map(|(at, sign)| Lexeme {
                kind: match sign {
                    '{' => Kind::BraceOpen,
                    '}' => Kind::BraceClose,
                    '(' | '[' => Kind::Open,
                    ')' | ']' => Kind::Close,
                    '|' => Kind::Bar,
                    '=' => Kind::Equal,
                    _ => Kind::Letter,
                },
                text: sign.to_string().into(),
                span: Span::new(at, at + 1),
            })
            .collect();
        match_brackets(&mut lexemes);
        lexemes
            .iter()
            .map(|lexeme| match lexeme.kind {
                Kind::Lone => '!',
                Kind::Open => '<',
                Kind::Close => '>',
                Kind::Bar => '|',
                Kind::BraceOpen => '{',
                Kind::BraceClose => '}',
                _ => '.',
            })
            .collect()
    }

    #[test]
    fn brackets_match_within_braces() {
        assert_eq!(shape("(a[b)c]"), "<.<.>.>");
        assert_eq!(shape("(a{b)}c)"), "<.{.!}.>");
        assert_eq!(shape("a)b("), ".!.!");
        assert_eq!(shape("{a"), "!.");
        assert_eq!(shape("a}"), ".!");
    }

    #[test]
    fn bars_match_in_order() {
        assert_eq!(shape("|a|=|b|"), "<.>.<.>");
        assert_eq!(shape("a|b"), ".|.");
        assert_eq!(shape("(a|b)|c|"), "<.|.><.>");
    }
}
