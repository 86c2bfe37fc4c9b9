//! Hover, highlights, references, definitions and renaming: questions about what stands at a place.

use indexwise_checker::editing::highlight::highlight;
use indexwise_checker::editing::hover;
use indexwise_checker::editing::references::{self, File, Location as Found};
use indexwise_checker::editing::rename;
use indexwise_grammar::lines::Lines;
use tower_lsp::jsonrpc::{Error, ErrorCode, Result};
use tower_lsp::lsp_types::{
    DocumentHighlight, DocumentHighlightKind, Hover, HoverContents, Location, MarkedString, PrepareRenameResponse,
    WorkspaceEdit,
};

use super::actions::edit_of_all;
use super::convert::Places;
use super::looking::Look;

/// What is told when hovering. The Markdown is written so that it reads as plain text, too.
pub fn hover(look: &Look) -> Option<Hover> {
    let hover = hover::hover(look.view(), look.document, look.offset(), look.found())?;
    let contents = match look.client().hover {
        Some(markup) => HoverContents::Markup(markup.content(hover.markdown)),
        None => HoverContents::Scalar(MarkedString::String(hover.markdown)),
    };
    Some(Hover { contents, range: Some(look.range(hover.span)) })
}

/// What lights up with a place: the partner in a sum as what is written, other places as what is read.
pub fn highlights(look: &Look) -> Vec<DocumentHighlight> {
    let found = highlight(look.view(), look.document, look.offset());
    let one = |one: &indexwise_checker::editing::highlight::Highlight| DocumentHighlight {
        range: look.range(one.span),
        kind: Some(if one.partner { DocumentHighlightKind::WRITE } else { DocumentHighlightKind::READ }),
    };
    found.iter().map(one).collect()
}

/// The places that speak of what stands at a place.
pub fn references(look: &Look, with_declarations: bool) -> Vec<Location> {
    let found = references::references(look.view(), look.document, look.offset(), with_declarations);
    found.iter().filter_map(|one| location(look, one)).collect()
}

/// Where it is declared or defined.
pub fn definition(look: &Look) -> Vec<Location> {
    let found = references::definition(look.view(), look.document, look.offset());
    found.iter().filter_map(|one| location(look, one)).collect()
}

fn location(look: &Look, found: &Found) -> Option<Location> {
    let picture = &look.judged.picture;
    match found.file {
        File::Document(document) => picture.location(document, found.span),
        File::Style(style) => {
            let (uri, text) = picture.styles.get(style)?;
            let lines = Lines::new(text);
            let places = Places { text, lines: &lines, encoding: look.client().encoding };
            Some(Location { uri: uri.clone()?, range: places.range(found.span) })
        }
    }
}

/// What would be renamed.
pub fn prepare_rename(look: &Look) -> Result<Option<PrepareRenameResponse>> {
    let found = rename::prepare_rename(look.view(), look.document, look.offset()).map_err(refused)?;
    let range = look.range(found.span);
    Ok(Some(PrepareRenameResponse::RangeWithPlaceholder { range, placeholder: found.text }))
}

/// The edits that rename it.
pub fn rename(look: &Look, to: &str) -> Result<Option<WorkspaceEdit>> {
    let edits = rename::rename(look.view(), look.document, look.offset(), to).map_err(refused)?;
    Ok(Some(edit_of_all(look, &edits)))
}

/// The protocol's code for a request that was right and could not be done.
const REQUEST_FAILED: i64 = -32803;

fn refused(why: String) -> Error {
    Error { code: ErrorCode::ServerError(REQUEST_FAILED), message: why.into(), data: None }
}
