//! Semantic tokens: the letters of formulas with what they are.
//!
//! Every kind is one of the protocol's own, so that every theme has a colour for it.

use indexwise_checker::editing::tokens::{Token, TokenKind, tokens};
use indexwise_grammar::span::Span;
use tower_lsp::lsp_types::{Position, SemanticToken, SemanticTokenType, SemanticTokens};

use super::convert::Places;
use super::looking::Look;

/// The kinds of tokens, in the order of their numbers: free and summed indices, components, kernels, derivatives, labels.
pub const KINDS: [SemanticTokenType; 6] = [
    SemanticTokenType::PARAMETER,
    SemanticTokenType::VARIABLE,
    SemanticTokenType::NUMBER,
    SemanticTokenType::TYPE,
    SemanticTokenType::OPERATOR,
    SemanticTokenType::ENUM_MEMBER,
];

const fn number(kind: TokenKind) -> u32 {
    match kind {
        TokenKind::Free => 0,
        TokenKind::Dummy => 1,
        TokenKind::Component => 2,
        TokenKind::Kernel => 3,
        TokenKind::Derivative => 4,
        TokenKind::Label => 5,
    }
}

/// The tokens of a stretch of the document.
pub fn within(look: &Look, within: Span) -> SemanticTokens {
    let tokens = tokens(look.view(), look.document, within);
    let data = look.places().map(|places| encoded(&tokens, &places)).unwrap_or_default();
    SemanticTokens { result_id: None, data }
}

/// Tokens in order as the protocol wants them: each by its distance from the one before.
fn encoded(tokens: &[Token], places: &Places<'_>) -> Vec<SemanticToken> {
    let mut before = Position::default();
    let one = |token: &Token| {
        let range = places.range(token.span);
        let start = range.start;
        let delta_line = start.line.checked_sub(before.line)?;
        let delta_start =
            if delta_line == 0 { start.character.checked_sub(before.character)? } else { start.character };
        let length = range.end.character.checked_sub(start.character).filter(|_| range.end.line == start.line)?;
        before = start;
        Some(SemanticToken {
            delta_line,
            delta_start,
            length,
            token_type: number(token.kind),
            token_modifiers_bitset: 0,
        })
    };
    tokens.iter().filter_map(one).collect()
}
