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
    let mut awaited = Awaited::default();
    let mut deepest = 0;
    let mut open_now = 0_usize;
    for at in 0..lexemes.len() {
        let Some(kind) = lexemes.get(at).map(|lexeme| lexeme.kind) else { break };
        awaited.see(lexemes, at);
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
        deepest = deepest.max(open_now + awaited.depth());
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

/// Commands that still await an argument: without braces they nest (`\sqrt\sqrt x`, `\frac1\frac1 x`).
#[derive(Default)]
struct Awaited {
    /// For every open bracket, what the commands before it await, the innermost last.
    outside: Vec<Vec<usize>>,
    /// What the commands of the present bracket await.
    here: Vec<usize>,
    /// How many commands await something outside.
    count: usize,
}

impl Awaited {
    fn depth(&self) -> usize {
        self.count + self.here.len()
    }

    fn see(&mut self, lexemes: &[Lexeme], at: usize) {
        let Some(kind) = lexemes.get(at).map(|lexeme| lexeme.kind) else { return };
        match kind {
            Kind::BraceOpen | Kind::Open => {
                self.count += self.here.len();
                self.outside.push(std::mem::take(&mut self.here));
            }
            Kind::BraceClose | Kind::Close => {
                self.here = self.outside.pop().unwrap_or_default();
                self.count = self.count.saturating_sub(self.here.len());
                self.complete();
            }
            Kind::Plus | Kind::Equal | Kind::Loose | Kind::Arrow | Kind::Comma | Kind::Semicolon => self.here.clear(),
            Kind::Times | Kind::Slash | Kind::Prime | Kind::Factorial | Kind::Stagger => {}
            _ => match arguments(kind) {
                0 => self.complete(),
                number => {
                    // An option in square brackets counts as one more.
                    let option = lexemes.get(at + 1).is_some_and(|next| next.kind == Kind::Open && next.text == "[");
                    self.here.push(number + usize::from(option));
                }
            },
        }
    }

    /// An atom is the argument of the innermost command, which may be its last.
    fn complete(&mut self) {
        while let Some(number) = self.here.last_mut() {
            *number -= 1;
            if *number > 0 {
                return;
            }
            self.here.pop();
        }
    }
}

/// How many lexemes a command takes as its arguments.
fn arguments(kind: Kind) -> usize {
    use Kind::*;
    match kind {
        Fraction => 2,
        Accent | Bold | Roman | Root | Wrap | Brace | Norm | Average | Pair | Derivative | Differential | Slashed
        | Order | Tensor | Up | Down | Unknown => 1,
        _ => 0,
    }
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
    fn arguments_without_braces_nest() {
        let deep = |signs: &str| {
            let lexeme = |(at, sign): (usize, char)| Lexeme {
                kind: match sign {
                    'F' => Kind::Fraction,
                    'R' => Kind::Root,
                    '[' => Kind::Open,
                    ']' => Kind::Close,
                    '+' => Kind::Plus,
                    _ => Kind::Letter,
                },
                text: sign.to_string().into(),
                span: Span::new(at, at + 1),
            };
            let mut lexemes: Vec<Lexeme> = signs.char_indices().map(lexeme).collect();
            !match_brackets(&mut lexemes)
        };
        assert!(deep(&"F1".repeat(100)) && deep(&"R".repeat(100)) && deep(&"R[1]".repeat(100)));
        assert!(!deep(&"F12".repeat(100)) && !deep(&"R1".repeat(100)) && !deep(&"F1+".repeat(100)));
        assert!(!deep(&"R[1]2".repeat(100)) && !deep(&"F1F23".repeat(100)));
    }

    #[test]
    fn bars_match_in_order() {
        assert_eq!(shape("|a|=|b|"), "<.>.<.>");
        assert_eq!(shape("a|b"), ".|.");
        assert_eq!(shape("(a|b)|c|"), "<.|.><.>");
    }
}
