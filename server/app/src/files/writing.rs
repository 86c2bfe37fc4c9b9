//! Writing a file so that at every moment either the old or the new text is there, whole.
//!
//! The new text goes into a temporary file in the same folder, is flushed to the disk, gets the permissions of
//! the old file and takes its place by a rename, which the system does in one step. A symbolic link is followed
//! first, so that its target is written and the link stays. Traps: a file without write permission could still
//! be replaced by a rename, so it is refused; hard links part ways.

use std::fs::{self, File};
use std::io::{self, Write};
use std::path::Path;

/// The steps after which a test may let the writing fail or the process end.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Step {
    /// The temporary file is there, empty.
    Created,
    /// Half of the text is written.
    HalfWritten,
    /// All of it is written.
    Written,
    /// It is on the disk.
    Synced,
    /// It has the permissions of the old file; the rename comes next.
    Ready,
}

/// Replaces the text of an existing file; `create` below writes a new one.
pub fn replace(path: &Path, bytes: &[u8]) -> io::Result<()> {
    replace_in_steps(path, bytes, &mut |_| Ok(()))
}

fn replace_in_steps(path: &Path, bytes: &[u8], after: &mut dyn FnMut(Step) -> io::Result<()>) -> io::Result<()> {
    let target = path.canonicalize()?;
    let permissions = fs::metadata(&target)?.permissions();
    if permissions.readonly() {
        return Err(io::Error::other("is read-only"));
    }
    let folder = target.parent().ok_or_else(|| io::Error::other("has no folder"))?;
    // Dropped on the way out of an error, the temporary file removes itself.
    let mut file = tempfile::Builder::new().prefix(".indexwise-").tempfile_in(folder)?;
    after(Step::Created)?;
    let (front, back) = bytes.split_at(bytes.len() / 2);
    file.write_all(front)?;
    after(Step::HalfWritten)?;
    file.write_all(back)?;
    file.flush()?;
    after(Step::Written)?;
    file.as_file().sync_all()?;
    after(Step::Synced)?;
    fs::set_permissions(file.path(), permissions)?;
    after(Step::Ready)?;
    file.persist(&target).map_err(|failed| failed.error)?;
    sync_folder(folder);
    Ok(())
}

/// Writes a new file; one that is there already is left as it is, even if it came meanwhile.
pub fn create(path: &Path, bytes: &[u8]) -> io::Result<()> {
    let folder = match path.parent() {
        Some(folder) if folder.as_os_str().is_empty() => Path::new("."),
        Some(folder) => folder,
        None => return Err(io::Error::other("has no folder")),
    };
    let mut builder = tempfile::Builder::new();
    // The usual permissions of a new file, rather than the tight ones of a temporary file.
    #[cfg(unix)]
    builder.permissions(std::os::unix::fs::PermissionsExt::from_mode(0o666));
    let mut file = builder.prefix(".indexwise-").tempfile_in(folder)?;
    file.write_all(bytes)?;
    file.flush()?;
    file.as_file().sync_all()?;
    file.persist_noclobber(path).map_err(|failed| failed.error)?;
    sync_folder(folder);
    Ok(())
}

/// Makes the rename last through a power cut where the system can; where not, the file is whole all the same.
fn sync_folder(folder: &Path) {
    if let Ok(folder) = File::open(folder) {
        let _ = folder.sync_all();
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]
    use super::*;
    use std::path::PathBuf;
    use std::process::Command;

    const STEPS: [Step; 5] = [Step::Created, Step::HalfWritten, Step::Written, Step::Synced, Step::Ready];
    const OLD: &str = "the old text, of some length\n";

    fn folder_with_file() -> (tempfile::TempDir, PathBuf) {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("a.tex");
        fs::write(&path, OLD).unwrap();
        (folder, path)
    }

    fn entries(folder: &Path) -> usize {
        fs::read_dir(folder).unwrap().count()
    }

    #[test]
    fn the_text_is_replaced() {
        let (folder, path) = folder_with_file();
        replace(&path, b"new").unwrap();
        assert_eq!(fs::read(&path).unwrap(), b"new");
        assert_eq!(entries(folder.path()), 1);
    }

    #[test]
    fn a_failure_at_any_step_leaves_the_old_text_and_nothing_else() {
        for step in STEPS {
            let (folder, path) = folder_with_file();
            let mut fail = |at| if at == step { Err(io::Error::other("disk full")) } else { Ok(()) };
            let error = replace_in_steps(&path, b"new", &mut fail).unwrap_err();
            assert_eq!(error.to_string(), "disk full");
            assert_eq!(fs::read_to_string(&path).unwrap(), OLD, "{step:?}");
            assert_eq!(entries(folder.path()), 1, "{step:?}");
        }
    }

    /// The name of the file for a copy of the test program that is to end in the midst of writing.
    const KILLED_FILE: &str = "INDEXWISE_TEST_KILLED_FILE";
    /// And the step after which it ends.
    const KILLED_STEP: &str = "INDEXWISE_TEST_KILLED_STEP";

    #[test]
    fn a_process_that_dies_at_any_step_leaves_the_old_text() {
        if let Some(path) = std::env::var_os(KILLED_FILE) {
            let step = std::env::var(KILLED_STEP).unwrap();
            let mut die = |at: Step| if format!("{at:?}") == step { std::process::abort() } else { Ok(()) };
            let done = replace_in_steps(Path::new(&path), b"new", &mut die);
            panic!("the process went on: {done:?}");
        }
        for step in STEPS {
            let (_folder, path) = folder_with_file();
            let name = "files::writing::tests::a_process_that_dies_at_any_step_leaves_the_old_text";
            let mut copy = Command::new(std::env::current_exe().unwrap());
            copy.args(["--exact", name]).env(KILLED_FILE, &path).env(KILLED_STEP, format!("{step:?}"));
            let ended = copy.output().unwrap();
            assert!(!ended.status.success() && ended.status.code().is_none_or(|code| code != 101), "{ended:?}");
            assert_eq!(fs::read_to_string(&path).unwrap(), OLD, "{step:?}");
            // What a killed process leaves behind does not hinder the next.
            replace(&path, b"new").unwrap();
            assert_eq!(fs::read(&path).unwrap(), b"new");
        }
    }

    #[test]
    fn a_new_file_is_written_whole_and_never_over_another() {
        let (folder, path) = folder_with_file();
        let new = folder.path().join("new.toml");
        create(&new, b"text").unwrap();
        assert_eq!(fs::read(&new).unwrap(), b"text");
        assert_eq!(create(&path, b"new").unwrap_err().kind(), io::ErrorKind::AlreadyExists);
        assert_eq!(fs::read_to_string(&path).unwrap(), OLD);
        assert_eq!(entries(folder.path()), 2);
    }

    #[cfg(unix)]
    #[test]
    fn a_new_file_has_the_permissions_of_any_new_file() {
        use std::os::unix::fs::PermissionsExt;
        let folder = tempfile::tempdir().unwrap();
        let (ours, other) = (folder.path().join("ours"), folder.path().join("other"));
        create(&ours, b"").unwrap();
        fs::write(&other, b"").unwrap();
        let mode = |path: &Path| fs::metadata(path).unwrap().permissions().mode();
        assert_eq!(mode(&ours), mode(&other));
    }

    #[cfg(unix)]
    #[test]
    fn permissions_are_kept_and_a_read_only_file_is_refused() {
        use std::os::unix::fs::PermissionsExt;
        let (_folder, path) = folder_with_file();
        fs::set_permissions(&path, fs::Permissions::from_mode(0o640)).unwrap();
        replace(&path, b"new").unwrap();
        assert_eq!(fs::metadata(&path).unwrap().permissions().mode() & 0o777, 0o640);
        fs::set_permissions(&path, fs::Permissions::from_mode(0o444)).unwrap();
        assert_eq!(replace(&path, b"newer").unwrap_err().to_string(), "is read-only");
        assert_eq!(fs::read(&path).unwrap(), b"new");
    }

    #[cfg(unix)]
    #[test]
    fn a_link_stays_and_its_target_is_written() {
        let (folder, path) = folder_with_file();
        let link = folder.path().join("link.tex");
        std::os::unix::fs::symlink("a.tex", &link).unwrap();
        replace(&link, b"new").unwrap();
        assert!(fs::symlink_metadata(&link).unwrap().file_type().is_symlink());
        assert_eq!(fs::read(&path).unwrap(), b"new");
    }
}
