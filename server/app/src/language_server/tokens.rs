//! Semantic tokens.

use tower_lsp::lsp_types::SemanticTokenType;

/// The kinds of tokens, in the order of their numbers: free and summed indices, components, kernels, derivatives, labels.
pub const KINDS: [SemanticTokenType; 6] = [
    SemanticTokenType::PARAMETER,
    SemanticTokenType::VARIABLE,
    SemanticTokenType::NUMBER,
    SemanticTokenType::TYPE,
    SemanticTokenType::OPERATOR,
    SemanticTokenType::ENUM_MEMBER,
];
