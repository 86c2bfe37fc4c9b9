//! The disk under the open texts: a file is read again only when it has changed.
//!
//! Whether it has is told by its length and the time of its last change, so that nothing depends on a client that
//! watches files; watching only brings the change sooner.

use std::collections::HashMap;
use std::path::{Path, PathBuf};
use std::sync::{Mutex, PoisonError};
use std::time::SystemTime;

use crate::files::Text;
use crate::project::{Disk, Texts};

/// When so many files have been read, all are forgotten: who works that long works on others by now.
const MOST_FILES: usize = 4096;

/// What tells one state of a file from another.
type Stamp = (u64, Option<SystemTime>);

/// Files that were read.
#[derive(Debug, Default)]
pub struct RememberedDisk {
    read: Mutex<HashMap<PathBuf, (Stamp, Text)>>,
}

fn stamp(path: &Path) -> Option<Stamp> {
    let kind = path.metadata().ok()?;
    Some((kind.len(), kind.modified().ok()))
}

impl Texts for RememberedDisk {
    fn read(&self, path: &Path) -> Result<Text, String> {
        let Some(now) = stamp(path) else { return Disk.read(path) };
        let mut read = self.read.lock().unwrap_or_else(PoisonError::into_inner);
        if let Some((then, text)) = read.get(path)
            && *then == now
        {
            return Ok(text.clone());
        }
        let text = Disk.read(path)?;
        if read.len() >= MOST_FILES {
            read.clear();
        }
        read.insert(path.to_owned(), (now, text.clone()));
        Ok(text)
    }

    fn real_path(&self, path: &Path) -> Option<PathBuf> {
        Disk.real_path(path)
    }

    fn latex_files_in(&self, folder: &Path) -> Vec<PathBuf> {
        Disk.latex_files_in(folder)
    }

    fn is_project(&self, folder: &Path) -> bool {
        Disk.is_project(folder)
    }
}
