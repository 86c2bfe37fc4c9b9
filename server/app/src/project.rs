//! Papers: which texts are read together.
//!
//! `roots.rs` says to which paper a file belongs, `parts.rs` loads that paper: the root, its parts and its
//! local styles. The one idea: a paper is a function of the file and of what stands on the disk, never of which
//! other files are checked in the same run, so that the findings of a file are always the same.
//!
//! Texts come through the trait `Texts`, so that a text that is not on the disk (standard input, a mended text)
//! can stand in for one that is.

mod parts;
mod roots;
#[cfg(test)]
mod tests;
mod texts;

use std::path::{Path, PathBuf};

use indexwise_grammar::hosts::{Host, Reference, ReferenceKind, scan};
use indexwise_grammar::macros::Macros;

pub use parts::{Loaded, load};
pub use roots::Roots;
pub use texts::{Disk, DiskWithProject, Overlay, Texts};

/// What makes a paper: two files belong to one paper if and only if these are equal.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct PaperKey {
    /// The real path of the root.
    pub root: PathBuf,
    /// A file that names the root without being reached from it; it is read after the root's parts.
    pub appended: Option<PathBuf>,
    /// What kind of file the root is; only LaTeX has parts.
    pub host: Host,
}

impl PaperKey {
    fn alone(root: &Path, host: Host) -> Self {
        Self { root: root.to_owned(), appended: None, host }
    }
}

/// What a file says of other files.
#[derive(Debug, Default)]
struct Outline {
    references: Vec<Reference>,
    has_class: bool,
}

fn outline(text: &str, host: Host) -> Outline {
    if host != Host::Latex {
        return Outline::default();
    }
    let scan = scan(text, host, &Macros::default());
    Outline { references: scan.references, has_class: scan.has_class }
}

/// Nothing outside this folder is read for a file: the nearest one upwards that holds a repository or an
/// `indexwise.toml`.
fn marked_folder<'a>(texts: &dyn Texts, file: &'a Path) -> Option<&'a Path> {
    file.ancestors().skip(1).find(|folder| texts.is_project(folder))
}

/// The project of a root: the marked folder, else the folder of the root.
fn project_of<'a>(texts: &dyn Texts, root: &'a Path) -> &'a Path {
    marked_folder(texts, root).unwrap_or_else(|| folder_of(root))
}

fn folder_of(file: &Path) -> &Path {
    file.parent().unwrap_or(Path::new(""))
}

/// Where a name leads.
#[derive(Debug, PartialEq, Eq)]
enum Place {
    File(PathBuf),
    Outside,
    Missing,
}

/// Looks for a file by the name that an author wrote, in one folder after another. The suffix is tried first
/// where the name has none; a name like `part.one` is tried both ways.
fn locate(texts: &dyn Texts, name: &str, suffix: &str, folders: &[&Path], project: Option<&Path>) -> Place {
    let longer = format!("{name}{suffix}");
    let names = if Path::new(name).extension().is_some() { [name, &longer] } else { [&longer, name] };
    let mut place = Place::Missing;
    for folder in folders {
        for name in names {
            match texts.real_path(&folder.join(name)) {
                Some(real) if project.is_none_or(|project| real.starts_with(project)) => return Place::File(real),
                Some(_) => place = Place::Outside,
                None => {}
            }
        }
    }
    place
}

/// Quotation marks and blanks around a name are not part of it. A name made by a macro cannot be followed.
fn plain_name(reference: &Reference) -> Option<&str> {
    let name = reference.path.trim().trim_matches('"').trim();
    (!name.is_empty() && !name.contains(['\\', '#', '\0'])).then_some(name)
}

/// What a file says of its main file.
#[derive(Debug)]
enum Named<'a> {
    Nothing,
    Root(&'a Reference, PathBuf),
    Missing(&'a Reference),
    Outside(&'a Reference),
}

/// The main file that a file names. It counts only if the file lies in the main file's project, and the main
/// file in the file's.
fn named_root<'a>(texts: &dyn Texts, file: &Path, references: &'a [Reference]) -> Named<'a> {
    let own = marked_folder(texts, file);
    let mut named = Named::Nothing;
    for reference in references.iter().filter(|reference| reference.kind == ReferenceKind::Root) {
        let Some(name) = plain_name(reference) else { continue };
        let place = locate(texts, name, ".tex", &[folder_of(file)], own);
        match place {
            Place::File(root) if file.starts_with(project_of(texts, &root)) => return Named::Root(reference, root),
            Place::File(_) | Place::Outside => named = Named::Outside(reference),
            Place::Missing if matches!(named, Named::Nothing) => named = Named::Missing(reference),
            Place::Missing => {}
        }
    }
    named
}
