//! The author's own delimiters: macros and environments that open, close or wrap mathematics.
//!
//! `\newcommand{\be}{\begin{equation}}` opens a display, `\newcommand{\eqn}[1]{\begin{equation}#1\end{equation}}`
//! makes its argument one, `\newenvironment{eq}{\[}{\]}` is an environment of mathematics, and an environment that
//! begins a listing is a listing. The role of a name is found in its body, once, and kept.
//!
//! Traps: a macro that sets its argument inside a larger formula (`$T_{#1}$`) wraps nothing: its argument is no
//! formula. `\ensuremath{#1}` does not count either, since the macro is usually called within a formula. Roles depend
//! on one another, so a new definition drops what was kept; the search in bodies runs under `FUEL`.

use rustc_hash::FxHashMap;

use super::Setting;
use super::closer::{Closer, environment_name};
use super::vocabulary::{is_inner_rows, is_listing, mathematics};
use crate::macros::cursor::Cursor;
use crate::macros::{Definition, Macro, Macros, Parameter};
use crate::span::Span;

/// Longer bodies do not wrap: they set boxes, titles, pages.
const LONGEST_BODY: usize = 400;

/// Control sequences looked at for one role, over all the macros it rests on.
const FUEL: u32 = 256;

/// Macros that rest on macros, this deep.
const DEEPEST: u32 = 4;

/// What a macro or an environment does to the text around it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum Role {
    /// Mathematics starts after it.
    Opens {
        /// What ends it.
        closer: Closer,
        /// How it is set.
        setting: Setting,
    },
    /// Mathematics ends before it.
    Closes,
    /// One of its arguments is a formula.
    Wraps {
        /// Which argument, from zero.
        argument: usize,
        /// How it is set.
        setting: Setting,
    },
    /// The environment is a listing.
    Listing,
}

/// The macros in force while scanning, with their roles.
pub(super) struct Wrappers {
    macros: Macros,
    roles: FxHashMap<String, Option<Role>>,
}

/// What one token of a body does.
enum Event {
    Nothing,
    Opens(Closer, Setting),
    /// `$`, `$$`: opens or closes.
    Toggles(Closer, Setting),
    Closes,
    Lists,
}

impl Wrappers {
    /// Starts from the macros in force at the start of the text.
    pub(super) fn new(macros: &Macros) -> Self {
        Self { macros: macros.clone(), roles: FxHashMap::default() }
    }

    /// The macros defined so far.
    pub(super) fn macros(&self) -> &Macros {
        &self.macros
    }

    /// A definition comes into force at the end of its command.
    pub(super) fn define(&mut self, definition: &Definition) {
        self.macros.define(definition.meaning.clone(), definition.span.end, definition.provide);
        if !self.roles.is_empty() {
            self.roles.clear();
        }
    }

    /// The role of a name (of a macro without backslash, or of an environment) at a byte of the text.
    pub(super) fn role(&mut self, name: &str, at: usize) -> Option<Role> {
        if self.macros.is_empty() {
            return None;
        }
        self.macros.at(name, at as u32)?;
        if let Some(kept) = self.roles.get(name) {
            return kept.clone();
        }
        let role = self.find(name, at, 0, &mut { FUEL });
        self.roles.insert(name.to_owned(), role.clone());
        role
    }

    /// Takes the arguments of a call after its name, up to the argument `last` (all of them if none), and returns the
    /// span of the last one taken.
    pub(super) fn arguments<'t>(&self, name: &str, cursor: &mut Cursor<'t>, last: Option<usize>) -> Option<Span> {
        let meaning = self.macros.at(name, cursor.at as u32)?;
        let mut span = None;
        for parameter in meaning.parameters.iter().take(last.map_or(usize::MAX, |last| last + 1)) {
            match parameter {
                Parameter::Mandatory => span = Some(cursor.argument()?),
                // Only when it stands directly there: a formula itself may begin with a bracket.
                Parameter::Optional(_) if cursor.peek() == Some(b'[') => span = Some(cursor.bracket()?),
                Parameter::Optional(_) => {}
                Parameter::Star => _ = cursor.eat(b'*'),
                Parameter::Until(_) => return None,
            }
        }
        span
    }

    fn find(&self, name: &str, at: usize, depth: u32, fuel: &mut u32) -> Option<Role> {
        let meaning = self.macros.at(name, at as u32)?;
        if depth > DEEPEST || meaning.operator || meaning.body.len() > LONGEST_BODY {
            return None;
        }
        let mut opened: Option<(Closer, Setting, usize)> = None;
        let mut cursor = Cursor::new(&meaning.body, 0);
        while cursor.at < meaning.body.len() && *fuel > 0 {
            let here = cursor.at;
            match (self.event(&mut cursor, at, depth, fuel), &opened) {
                (Event::Lists, None) => return Some(Role::Listing),
                (Event::Opens(closer, setting) | Event::Toggles(closer, setting), None) => {
                    opened = Some((closer, setting, cursor.at));
                }
                (Event::Closes, None) => return Some(Role::Closes),
                (Event::Closes, Some((_, setting, from))) => return wraps(meaning, *from, here, *setting),
                (Event::Toggles(closer, _), Some((own, setting, from))) if closer == *own => {
                    return wraps(meaning, *from, here, *setting);
                }
                _ => {}
            }
        }
        let (closer, setting, from) = opened.filter(|(closer, ..)| *closer != Closer::Dollar)?;
        let rows = meaning.body.get(from..)?.match_indices("\\begin").any(|(start, begin)| {
            environment_name(&meaning.body, from + start + begin.len()).is_some_and(|(name, _)| is_inner_rows(name))
        });
        Some(Role::Opens { closer, setting: if rows { Setting::Rows } else { setting } })
    }

    /// Takes one token of a body.
    fn event(&self, cursor: &mut Cursor, at: usize, depth: u32, fuel: &mut u32) -> Event {
        if cursor.eat(b'$') {
            let double = cursor.eat(b'$');
            return if double {
                Event::Toggles(Closer::Dollars, Setting::Display)
            } else {
                Event::Toggles(Closer::Dollar, Setting::Inline)
            };
        }
        let Some(name) = cursor.control() else {
            cursor.at += 1;
            return Event::Nothing;
        };
        *fuel = fuel.saturating_sub(1);
        match name {
            "(" => Event::Opens(Closer::Parenthesis, Setting::Inline),
            "[" => Event::Opens(Closer::Bracket, Setting::Display),
            ")" | "]" => Event::Closes,
            "begin" | "end" => {
                let Some((environment, next)) = environment_name(cursor.text, cursor.at) else { return Event::Nothing };
                cursor.at = next;
                self.named(environment, name == "end", at, depth, fuel)
            }
            _ => match name.strip_prefix("end") {
                Some(environment) if mathematics(environment).is_some() => Event::Closes,
                _ => self.named(name, false, at, depth, fuel),
            },
        }
    }

    /// What the begin or the end of a named environment does; a macro does what it begins.
    fn named(&self, name: &str, ends: bool, at: usize, depth: u32, fuel: &mut u32) -> Event {
        if is_listing(name) {
            return Event::Lists;
        }
        if let Some(mathematics) = mathematics(name) {
            let closer = Closer::Environment(name.to_owned());
            return if ends { Event::Closes } else { Event::Opens(closer, mathematics.setting) };
        }
        match self.find(name, at, depth + 1, fuel) {
            Some(Role::Opens { .. }) if ends => Event::Closes,
            Some(Role::Opens { closer, setting }) => Event::Opens(closer, setting),
            Some(Role::Closes) => Event::Closes,
            Some(Role::Listing) => Event::Lists,
            _ => Event::Nothing,
        }
    }
}

/// The role of a body that opens mathematics at `from` and closes it at `to`.
fn wraps(meaning: &Macro, from: usize, to: usize, setting: Setting) -> Option<Role> {
    let inside = meaning.body.get(from..to)?;
    match sole_parameter(inside)? {
        0 => Some(Role::Opens { closer: Closer::Environment(meaning.name.clone()), setting }),
        number if number <= meaning.parameters.len() => Some(Role::Wraps { argument: number - 1, setting }),
        _ => None,
    }
}

/// The number of the parameter that is all there is in a formula, besides labels, alignment and punctuation;
/// 0 for `\BODY`, the content of the environment.
fn sole_parameter(inside: &str) -> Option<usize> {
    let mut found = None;
    let mut cursor = Cursor::new(inside, 0);
    while let Some(byte) = cursor.peek() {
        let here = cursor.at;
        let number = match byte {
            b'#' => Some(inside.get(here + 1..here + 2)?.parse().ok()?),
            b'\\' => harmless(&mut cursor)?,
            b' ' | b'\t' | b'\n' | b'\r' | b'&' | b'.' | b',' | b';' | b'{' | b'}' => None,
            _ => return None,
        };
        if number.is_some() && found.replace(number).is_some() {
            return None;
        }
        cursor.at = cursor.at.max(here + 1 + usize::from(byte == b'#'));
    }
    found.flatten()
}

/// Takes a command that adds nothing to a formula. `None`: it adds something. `Some(Some(0))`: `\BODY`.
fn harmless(cursor: &mut Cursor) -> Option<Option<usize>> {
    match cursor.control()? {
        "BODY" => return Some(Some(0)),
        "begin" | "end" => {
            let (name, next) = environment_name(cursor.text, cursor.at)?;
            is_inner_rows(name).then_some(())?;
            cursor.at = next;
        }
        "label" | "tag" => _ = cursor.group()?,
        "boxed" | "nonumber" | "notag" | "displaystyle" | "," | ";" | ":" | " " | "!" | "quad" => {}
        _ => return None,
    }
    Some(None)
}
