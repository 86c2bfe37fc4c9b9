//! Reads Rust sources just well enough to state laws about them: code without comments and strings, and the
//! paths that it names.
//!
//! This is no parser: it knows comments, literals, identifiers, `use` lists and `mod` blocks. It is total, and
//! for what it does not know it errs on the side of naming a path too many.

/// A path named by a source, in an import or in an expression: `std::fs::read` is three segments.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NamedPath {
    /// Identifiers in order; a macro's name ends with `!`, and a glob is left out.
    pub segments: Vec<String>,
    /// One-based.
    pub line: usize,
    /// How many inline modules stand around it; each takes one `super`.
    pub depth: usize,
}

/// The source with comments and the contents of literals blanked out; lines stay where they are.
pub fn code(source: &str) -> String {
    let signs: Vec<char> = source.chars().collect();
    let mut code = String::with_capacity(source.len());
    let mut at = 0;
    while at < signs.len() {
        let end = match blank_end(&signs, at) {
            Some(end) => {
                code.extend(signs[at..end].iter().map(|sign| if *sign == '\n' { '\n' } else { ' ' }));
                end
            }
            None => {
                code.push(signs[at]);
                at + 1
            }
        };
        at = end;
    }
    code
}

/// Where the comment or literal that begins at `at` ends; nothing if none begins there.
fn blank_end(signs: &[char], at: usize) -> Option<usize> {
    let rest = &signs[at..];
    let next = rest.get(1).copied();
    let in_word = at.checked_sub(1).is_some_and(|before| is_word(signs[before]));
    match rest[0] {
        '/' if next == Some('/') => Some(end_of(signs, at, |sign| sign == '\n')),
        '/' if next == Some('*') => Some(end_of_block_comment(signs, at)),
        '"' => Some(end_of_string(signs, at, '"')),
        'r' if !in_word => raw_string_end(signs, at),
        'b' if next == Some('r') && !in_word => raw_string_end(signs, at + 1),
        // A lifetime is a quote without a closing one two signs on.
        '\'' if next == Some('\\') || rest.get(2) == Some(&'\'') => Some(end_of_string(signs, at, '\'')),
        _ => None,
    }
}

fn end_of(signs: &[char], from: usize, stop: impl Fn(char) -> bool) -> usize {
    signs[from..].iter().position(|sign| stop(*sign)).map_or(signs.len(), |length| from + length)
}

fn end_of_block_comment(signs: &[char], from: usize) -> usize {
    let mut depth = 0_usize;
    let mut at = from;
    while at < signs.len() {
        match (signs[at], signs.get(at + 1)) {
            ('/', Some('*')) => (depth, at) = (depth + 1, at + 2),
            ('*', Some('/')) => (depth, at) = (depth - 1, at + 2),
            _ => at += 1,
        }
        if depth == 0 {
            return at;
        }
    }
    at.min(signs.len())
}

fn end_of_string(signs: &[char], from: usize, quote: char) -> usize {
    let mut at = from + 1;
    while at < signs.len() && signs[at] != quote {
        at += if signs[at] == '\\' { 2 } else { 1 };
    }
    (at + 1).min(signs.len())
}

/// The end of `r"..."` or `r#"..."#` that begins at `at`.
fn raw_string_end(signs: &[char], at: usize) -> Option<usize> {
    let hashes = signs[at + 1..].iter().take_while(|sign| **sign == '#').count();
    let open = at + 1 + hashes;
    if signs.get(open) != Some(&'"') {
        return None;
    }
    let closes = |quote: usize| {
        signs[quote] == '"' && signs[quote + 1..].iter().take(hashes).filter(|sign| **sign == '#').count() == hashes
    };
    Some((open + 1..signs.len()).find(|quote| closes(*quote)).map_or(signs.len(), |quote| quote + 1 + hashes))
}

fn is_word(sign: char) -> bool {
    sign.is_alphanumeric() || sign == '_'
}

/// Every path that a source names, imports spelled out one by one, in the order of the text.
pub fn paths(source: &str) -> Vec<NamedPath> {
    let tokens = tokens(&code(source));
    let mut reader = Reader { tokens: &tokens, at: 0, braces: 0, modules: Vec::new(), paths: Vec::new() };
    while let Some((token, _)) = tokens.get(reader.at) {
        match token.as_str() {
            "use" => {
                reader.at += 1;
                reader.tree(&[]);
            }
            word if word.starts_with(is_word) => reader.word(),
            _ => reader.sign(),
        }
    }
    reader.paths
}

/// Words, `::` and single signs with their one-based lines.
fn tokens(code: &str) -> Vec<(String, usize)> {
    let mut tokens = Vec::new();
    for (number, line) in (1..).zip(code.lines()) {
        let mut rest = line.trim_start();
        while let Some(first) = rest.chars().next() {
            let length = match first {
                _ if is_word(first) => rest.find(|sign| !is_word(sign)).unwrap_or(rest.len()),
                ':' if rest.starts_with("::") => 2,
                _ => first.len_utf8(),
            };
            let (token, after) = rest.split_at(length);
            tokens.push((token.to_owned(), number));
            rest = after.trim_start();
        }
    }
    tokens
}

/// A walk over tokens.
struct Reader<'a> {
    tokens: &'a [(String, usize)],
    at: usize,
    braces: usize,
    /// For each inline module around, the number of braces around its block.
    modules: Vec<usize>,
    paths: Vec<NamedPath>,
}

impl Reader<'_> {
    fn token(&self, ahead: usize) -> &str {
        self.tokens.get(self.at + ahead).map_or("", |(token, _)| token.as_str())
    }

    fn push(&mut self, segments: Vec<String>) {
        let line = self.tokens.get(self.at.saturating_sub(1)).map_or(1, |(_, line)| *line);
        self.paths.push(NamedPath { segments, line, depth: self.modules.len() });
    }

    /// One branch of a `use` tree, after `prefix`.
    fn tree(&mut self, prefix: &[String]) {
        let mut segments = prefix.to_vec();
        loop {
            match self.token(0) {
                "{" => {
                    self.at += 1;
                    while !matches!(self.token(0), "}" | "") {
                        let before = self.at;
                        self.tree(&segments);
                        self.at += usize::from(self.token(0) == "," || self.at == before);
                    }
                    self.at += 1;
                    return;
                }
                "::" => self.at += 1,
                "*" => {
                    self.at += 1;
                    return self.push(segments);
                }
                "as" => self.at += 2,
                word if word.starts_with(is_word) => {
                    segments.push(word.to_owned());
                    self.at += 1;
                }
                _ => return self.push(segments),
            }
        }
    }

    /// A path of an expression, or the head of an inline module.
    fn word(&mut self) {
        if self.token(0) == "mod" && self.token(2) == "{" {
            self.modules.push(self.braces);
            self.braces += 1;
            self.at += 3;
            return;
        }
        let mut segments = vec![self.token(0).to_owned()];
        self.at += 1;
        while self.token(0) == "::" && self.token(1).starts_with(is_word) {
            segments.push(self.token(1).to_owned());
            self.at += 2;
        }
        if self.token(0) == "!"
            && let Some(last) = segments.last_mut()
        {
            last.push('!');
        }
        self.push(segments);
    }

    fn sign(&mut self) {
        match self.token(0) {
            "{" => self.braces += 1,
            "}" => {
                self.braces = self.braces.saturating_sub(1);
                if self.modules.last() == Some(&self.braces) {
                    self.modules.pop();
                }
            }
            _ => {}
        }
        self.at += 1;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn named(source: &str) -> Vec<String> {
        paths(source).iter().map(|path| path.segments.join("::")).collect()
    }

    #[test]
    fn comments_and_literals_are_not_code() {
        let source = "a // b\n/* c /* d */ e */ f \"g \\\" h\" 'i' r#\"j \" k\"# b\"l\" &'m n";
        let words: Vec<_> = code(source).split_whitespace().map(str::to_owned).collect();
        assert_eq!(words, ["a", "f", "b", "&'m", "n"]);
        assert_eq!(code(source).lines().count(), 2);
    }

    #[test]
    fn what_is_left_open_ends_with_the_source() {
        for source in ["\"a", "/* a", "r#\"a\"", "'\\", "\"a\\", "//"] {
            assert!(code(source).trim().is_empty(), "{source}");
        }
    }

    #[test]
    fn imports_are_spelled_out() {
        assert_eq!(
            named("use std::{fs::{self, File}, io as other};\nuse crate::span::*;"),
            ["std::fs::self", "std::fs::File", "std::io", "crate::span"]
        );
    }

    #[test]
    fn paths_of_expressions_and_macros_are_named_with_their_lines() {
        let found = paths("fn f() {\n    std::fs::read(x);\n    println!();\n}");
        let of = |name: &str| found.iter().find(|path| path.segments.join("::") == name).map(|path| path.line);
        assert_eq!(of("std::fs::read"), Some(2));
        assert_eq!(of("println!"), Some(3));
    }

    #[test]
    fn inline_modules_are_counted() {
        let found = paths("use super::a;\nmod tests {\n    fn f() { super::b(); }\n}\nfn g() { super::c() }");
        let supers = found.iter().filter(|path| path.segments[0] == "super");
        assert_eq!(supers.map(|path| path.depth).collect::<Vec<_>>(), [0, 1, 0]);
    }
}
