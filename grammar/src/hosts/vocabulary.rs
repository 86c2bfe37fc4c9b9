//! The words of LaTeX that decide where mathematics stands: environments and commands, each with its part.
//!
//! Only tables, no scanning. A starred form plays the part of the plain one.

use super::Setting;

/// An environment that sets mathematics.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Mathematics {
    /// How it is set.
    pub setting: Setting,
    /// Braced arguments before the mathematics (`\begin{alignat}{2}`).
    pub groups: u8,
}

/// The part that an environment of mathematics plays, by its name.
pub(super) fn mathematics(name: &str) -> Option<Mathematics> {
    let (setting, groups) = match name.strip_suffix('*').unwrap_or(name) {
        "math" => (Setting::Inline, 0),
        "equation" | "displaymath" | "dmath" => (Setting::Display, 0),
        "align" | "flalign" | "gather" | "multline" | "eqnarray" | "subeqnarray" | "darray" => (Setting::Rows, 0),
        "alignat" | "xalignat" | "xxalignat" | "IEEEeqnarray" | "empheq" => (Setting::Rows, 1),
        _ => return None,
    };
    Some(Mathematics { setting, groups })
}

/// Whether an environment shows its content as typed (or drops it), so that nothing in it is read.
pub(super) fn is_listing(name: &str) -> bool {
    let plain = name.strip_suffix('*').unwrap_or(name);
    matches!(plain, "verbatim" | "Verbatim" | "BVerbatim" | "LVerbatim" | "SaveVerbatim" | "VerbatimOut" | "alltt")
        || matches!(plain, "lstlisting" | "minted" | "comment" | "filecontents" | "luacode" | "tcblisting")
}

/// Whether an environment draws: its coordinates may be computed between dollars (`($(a)!0.5!(b)$)`).
pub(super) fn is_picture(name: &str) -> bool {
    matches!(name, "tikzpicture" | "pgfpicture" | "circuitikz" | "scope")
}

/// Whether an environment shapes the document, so that it never stands inside a formula.
pub(super) fn is_structure(name: &str) -> bool {
    matches!(name, "document" | "itemize" | "enumerate" | "description" | "figure" | "table" | "center" | "quote")
        || matches!(name, "quotation" | "abstract" | "proof" | "theorem" | "lemma" | "definition" | "remark")
        || matches!(name, "corollary" | "proposition" | "example" | "frame" | "appendices" | "subequations")
}

/// Whether an inner environment aligns rows, so that a formula which is one of them is set in rows.
pub(super) fn is_inner_rows(name: &str) -> bool {
    matches!(name.strip_suffix('*').unwrap_or(name), "aligned" | "split" | "gathered" | "alignedat" | "multlined")
}

/// Whether a command takes text: between dollars in its argument stands mathematics within mathematics.
pub(super) fn takes_text(name: &str) -> bool {
    matches!(name, "text" | "mbox" | "hbox" | "textrm" | "textit" | "textbf" | "textsf" | "texttt" | "textup")
        || matches!(name, "textnormal" | "textsc" | "textsl" | "textmd" | "emph" | "intertext" | "shortintertext")
        || matches!(name, "vbox" | "fbox" | "makebox" | "framebox" | "parbox" | "footnote" | "tag" | "raisebox")
        || matches!(name, "colorbox" | "fcolorbox" | "rlap" | "llap" | "clap" | "scalebox" | "rotatebox")
        || matches!(name, "resizebox" | "textcolor" | "footnotetext" | "mathrlap")
}

/// What a command of the running text means to the scan.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Command {
    /// `\begin`.
    Begin,
    /// `\end`.
    End,
    /// `\verb`: what stands between two equal characters is not read.
    Verb,
    /// `\lstinline`, `\mintinline`: as `\verb`, or in braces.
    InlineListing {
        /// An argument names the language first.
        language: bool,
    },
    /// A heading of a level.
    Heading(u8),
    /// `\documentclass`.
    Class,
    /// `\usepackage`, `\RequirePackage`.
    Package,
    /// A part named by one argument (`true`: that argument may be bare, `\input file`).
    Part(bool),
    /// A part named by a folder and a file.
    PartOfFolder,
    /// `\iffalse`.
    SkippedBranch,
    /// A command whose first argument is a key, a file or an address, never text.
    Opaque,
    /// `\ensuremath`: its argument is mathematics.
    Ensure,
    /// A paragraph ends here.
    Break,
}

/// The part that a command plays, by its name without backslash.
pub(super) fn command(name: &str) -> Option<Command> {
    Some(match name {
        "begin" => Command::Begin,
        "end" => Command::End,
        "verb" | "Verb" => Command::Verb,
        "lstinline" => Command::InlineListing { language: false },
        "mintinline" => Command::InlineListing { language: true },
        "part" | "chapter" => Command::Heading(0),
        "section" => Command::Heading(1),
        "subsection" => Command::Heading(2),
        "subsubsection" => Command::Heading(3),
        "documentclass" | "documentstyle" => Command::Class,
        "usepackage" | "RequirePackage" => Command::Package,
        "input" => Command::Part(true),
        "include" | "subfile" | "subfileinclude" | "InputIfFileExists" => Command::Part(false),
        "import" | "subimport" | "inputfrom" | "subinputfrom" | "includefrom" | "subincludefrom" => {
            Command::PartOfFolder
        }
        "iffalse" => Command::SkippedBranch,
        "label" | "ref" | "eqref" | "cref" | "Cref" | "autoref" | "pageref" | "nameref" => Command::Opaque,
        "cite" | "citep" | "citet" | "nocite" | "parencite" | "textcite" | "autocite" => Command::Opaque,
        "url" | "href" | "path" | "nolinkurl" | "includegraphics" | "includestandalone" => Command::Opaque,
        "bibliography" | "addbibresource" | "lstinputlisting" | "inputminted" | "VerbatimInput" => Command::Opaque,
        "ensuremath" => Command::Ensure,
        "par" | "item" | "paragraph" | "subparagraph" => Command::Break,
        _ => return None,
    })
}
