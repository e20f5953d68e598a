//! Output files: written whole or not at all, and several together or none.
//!
//! The place is checked, and its folder made, before any long work begins; the contents go to temporary files
//! beside their targets, reach the disk, and only then take their names.

use std::fs;
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use tempfile::{NamedTempFile, TempPath};

use crate::problem::{Problem, plain_reason};

/// A folder that can take output files. A folder made for it goes away again if no file was ever put there.
#[derive(Debug)]
pub struct OutputFolder {
    path: PathBuf,
    /// The folders that were made, deepest first.
    made: Vec<PathBuf>,
}

impl OutputFolder {
    /// Makes the folder if it is not there, and makes sure that files can be written in it.
    ///
    /// # Errors
    /// Where it cannot be made or written.
    pub fn prepare(path: impl Into<PathBuf>) -> Result<Self, Problem> {
        let path = path.into();
        let missing =
            |folder: &&Path| !folder.as_os_str().is_empty() && fs::symlink_metadata(folder).is_err();
        let made = path.ancestors().take_while(missing).map(Path::to_path_buf).collect();
        // From here on, dropping it takes away what was made, also halfway.
        let folder = Self { path, made };
        fs::create_dir_all(folder.real_path()).map_err(|error| folder.refused("made", &error))?;
        folder.temporary().map_err(|error| folder.refused("written", &error))?;
        Ok(folder)
    }

    /// The folder of an output file, which must be there already, and the file must not be a folder.
    ///
    /// # Errors
    /// Where the file cannot be written.
    pub fn of_file(file: &Path) -> Result<(Self, String), Problem> {
        let parent = file.parent().unwrap_or(Path::new("")).to_path_buf();
        let folder = Self { path: parent, made: Vec::new() };
        let Some(name) = file.file_name().and_then(|name| name.to_str()).filter(|_| !file.is_dir()) else {
            return Err(Problem::new("this names a folder, not a file")
                .in_file(file)
                .help("add the name of the file, such as contact.rs"));
        };
        refuse_special(file)?;
        folder.temporary().map_err(|error| folder.refused("written", &error))?;
        Ok((folder, name.to_owned()))
    }

    /// The folder, as the user wrote it.
    #[must_use]
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// Begins a set of files that appear together or not at all.
    #[must_use]
    pub fn stage(self) -> StagedFiles {
        StagedFiles { files: Vec::new(), folder: self }
    }

    /// An empty path means the current folder, which the system wants as a point.
    fn real_path(&self) -> &Path {
        if self.path.as_os_str().is_empty() { Path::new(".") } else { &self.path }
    }

    fn temporary(&self) -> io::Result<NamedTempFile> {
        let mut builder = tempfile::Builder::new();
        builder.prefix(".harness-");
        #[cfg(unix)]
        {
            use std::os::unix::fs::PermissionsExt;
            // Results are for others to read too; the umask still applies.
            builder.permissions(fs::Permissions::from_mode(0o644));
        }
        builder.tempfile_in(self.real_path())
    }

    fn refused(&self, what: &str, error: &io::Error) -> Problem {
        let help = match error.kind() {
            io::ErrorKind::NotFound => "make the folder first, or give another",
            io::ErrorKind::AlreadyExists | io::ErrorKind::NotADirectory => {
                "a file stands where a folder is needed; give another folder"
            }
            _ => "give another folder, or make this one writable",
        };
        Problem::new(format!("the output folder cannot be {what}: {}", plain_reason(error)))
            .in_file(self.real_path())
            .help(help)
    }
}

/// A device or a pipe cannot be replaced by a file, and must not be.
fn refuse_special(file: &Path) -> Result<(), Problem> {
    match fs::metadata(file) {
        Ok(found) if !found.is_file() => {
            Err(Problem::new("this is a device or a pipe, not an ordinary file")
                .in_file(file)
                .help("give the name of a file"))
        }
        _ => Ok(()),
    }
}

impl Drop for OutputFolder {
    fn drop(&mut self) {
        for folder in &self.made {
            // A folder that has files in it by now refuses, and that is what is wanted.
            if fs::remove_dir(folder).is_err() {
                return;
            }
        }
    }
}

/// Files that are complete on disk under temporary names, and vanish unless they are committed.
#[derive(Debug)]
pub struct StagedFiles {
    // The order matters: the files must be gone before the folder that was made for them can go.
    files: Vec<(PathBuf, TempPath)>,
    folder: OutputFolder,
}

impl StagedFiles {
    /// Writes one file completely, under a temporary name.
    ///
    /// # Errors
    /// Where it cannot be written; nothing of it is left then.
    pub fn add(
        &mut self,
        name: &str,
        write: impl FnOnce(&mut dyn Write) -> io::Result<()>,
    ) -> Result<(), Problem> {
        let target = self.folder.path.join(name);
        let failed = |error: io::Error| {
            Problem::new(format!("the file cannot be written: {}", plain_reason(&error)))
                .in_file(&target)
                .help("make room on the disk, or give another folder")
        };
        if target.is_dir() {
            return Err(Problem::new("there is a folder of this name").in_file(&target).help("move it away"));
        }
        refuse_special(&target)?;
        let file = self.folder.temporary().map_err(failed)?;
        let mut buffered = io::BufWriter::new(file);
        write(&mut buffered).map_err(failed)?;
        let file = buffered.into_inner().map_err(|error| failed(error.into_error()))?;
        // A disk that fills up late says so only here.
        file.as_file().sync_all().map_err(failed)?;
        self.files.push((target, file.into_temp_path()));
        Ok(())
    }

    /// Gives every file its name; where one refuses, the ones before it are taken back.
    ///
    /// # Errors
    /// Where a file cannot take its name.
    pub fn commit(mut self) -> Result<Vec<PathBuf>, Problem> {
        let mut done: Vec<(PathBuf, Option<TempPath>)> = Vec::new();
        for (target, file) in std::mem::take(&mut self.files) {
            let result = self.keep_old(&target).and_then(|old| {
                file.persist(&target).map_err(|error| error.error)?;
                Ok(old)
            });
            match result {
                Ok(old) => done.push((target, old)),
                Err(error) => {
                    let mut problem =
                        Problem::new(format!("the file cannot be put in place: {}", plain_reason(&error)))
                            .in_file(&target)
                            .help("make the folder and the file writable");
                    for target in take_back(done) {
                        problem =
                            problem.help(format!("{} could not be taken back and is new", target.display()));
                    }
                    return Err(problem);
                }
            }
        }
        Ok(done.into_iter().map(|(target, _)| target).collect())
    }

    /// A second name for the file that is about to be replaced.
    fn keep_old(&self, target: &Path) -> io::Result<Option<TempPath>> {
        if fs::symlink_metadata(target).is_err() {
            return Ok(None);
        }
        let old = self.folder.temporary()?.into_temp_path();
        fs::copy(target, &old)?;
        Ok(Some(old))
    }
}

/// Puts back what was there before; returns the files for which that failed.
fn take_back(done: Vec<(PathBuf, Option<TempPath>)>) -> Vec<PathBuf> {
    let restore = |target: &Path, old: Option<TempPath>| match old {
        Some(old) => old.persist(target).is_ok(),
        None => fs::remove_file(target).is_ok(),
    };
    done.into_iter().rev().filter_map(|(target, old)| (!restore(&target, old)).then_some(target)).collect()
}

#[cfg(test)]
mod tests {
    use std::fs::File;

    use super::*;

    fn names(folder: &Path) -> Vec<String> {
        let entries = fs::read_dir(folder).unwrap();
        let mut names: Vec<_> =
            entries.map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
        names.sort();
        names
    }

    #[test]
    fn files_committed_together_appear_whole_and_readable() {
        let root = tempfile::tempdir().unwrap();
        let path = root.path().join("deep/out");
        let mut staged = OutputFolder::prepare(&path).unwrap().stage();
        staged.add("a.json", |file| file.write_all(b"{}")).unwrap();
        staged.add("b.rs", |file| file.write_all(b"//")).unwrap();
        assert!(names(&path).iter().all(|name| name.starts_with(".harness-")), "{:?}", names(&path));
        assert_eq!(staged.commit().unwrap(), [path.join("a.json"), path.join("b.rs")]);
        assert_eq!(names(&path), ["a.json", "b.rs"]);
        assert_eq!(fs::read(path.join("b.rs")).unwrap(), b"//");
        #[cfg(unix)]
        {
            use std::os::unix::fs::PermissionsExt;
            let mode = fs::metadata(path.join("a.json")).unwrap().permissions().mode();
            assert_eq!(mode & 0o777 & !0o022, 0o644, "{mode:o}");
        }
    }

    #[test]
    fn files_never_committed_leave_nothing_not_even_the_folder() {
        let root = tempfile::tempdir().unwrap();
        let mut staged = OutputFolder::prepare(root.path().join("deep/out")).unwrap().stage();
        staged.add("a.json", |file| file.write_all(b"{}")).unwrap();
        drop(staged);
        assert!(names(root.path()).is_empty());
    }

    #[cfg(target_os = "linux")]
    #[test]
    fn files_on_a_full_disk_leave_nothing_and_keep_the_old() {
        let root = tempfile::tempdir().unwrap();
        fs::write(root.path().join("a.json"), "old").unwrap();
        let mut staged = OutputFolder::prepare(root.path()).unwrap().stage();
        staged.add("a.json", |file| file.write_all(b"new")).unwrap();
        // The kernel's own device for this: every write to it finds no space.
        let problem = staged.add("b.rs", |_| File::create("/dev/full")?.write_all(b"//")).expect_err("full");
        assert_eq!(problem.message(), "the file cannot be written: no space left on device");
        drop(staged);
        assert_eq!(names(root.path()), ["a.json"]);
        assert_eq!(fs::read(root.path().join("a.json")).unwrap(), b"old");
    }

    #[test]
    fn files_of_which_one_cannot_take_its_name_are_taken_back() {
        let root = tempfile::tempdir().unwrap();
        fs::write(root.path().join("a.json"), "old").unwrap();
        let mut staged = OutputFolder::prepare(root.path()).unwrap().stage();
        for name in ["a.json", "b.json", "c.json"] {
            staged.add(name, |file| file.write_all(b"new")).unwrap();
        }
        // Someone makes a folder of that name after it was checked.
        fs::create_dir(root.path().join("c.json")).unwrap();
        staged.commit().expect_err("c.json is a folder by now");
        assert_eq!(names(root.path()), ["a.json", "c.json"]);
        assert_eq!(fs::read(root.path().join("a.json")).unwrap(), b"old");
    }

    #[test]
    fn output_folder_that_cannot_be_is_refused_at_once() {
        let root = tempfile::tempdir().unwrap();
        fs::write(root.path().join("file"), "").unwrap();
        for path in ["file", "file/out"] {
            let problem = OutputFolder::prepare(root.path().join(path)).expect_err(path);
            assert!(problem.message().starts_with("the output folder cannot be made: "), "{problem}");
        }
        assert!(
            OutputFolder::of_file(root.path()).expect_err("a folder").message().contains("names a folder")
        );
        let problem = OutputFolder::of_file(&root.path().join("missing/a.rs")).expect_err("no folder");
        assert!(problem.message().starts_with("the output folder cannot be written: "), "{problem}");
        assert_eq!(names(root.path()), ["file"]);
    }

    #[cfg(target_os = "linux")]
    #[test]
    fn output_folder_that_nobody_may_write_is_refused_at_once() {
        // Holds for root as well, unlike a folder without write permission.
        let problem = OutputFolder::prepare("/proc/harness-out").expect_err("no one makes folders there");
        assert!(problem.message().starts_with("the output folder cannot be made: "), "{problem}");
        let problem = OutputFolder::of_file(Path::new("/dev/full")).expect_err("a device");
        assert!(problem.message().starts_with("this is a device or a pipe"), "{problem}");
        let problem = OutputFolder::prepare("/proc/self").expect_err("no one writes files there");
        assert!(problem.message().starts_with("the output folder cannot be written: "), "{problem}");
    }
}
