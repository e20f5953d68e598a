//! How a result was obtained: with what, from what, and the command that obtains it again.

use std::fs::File;
use std::io;
use std::path::Path;

use maud::html;

use super::{Cell, Section, table};
use crate::digest::Digest;
use crate::study::Observed;

/// Where a report comes from.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Origin {
    /// The command as it was given.
    pub command: String,
    /// The files that were read.
    pub files: Vec<SourceFile>,
    /// What was drawn at random, each with its seed; empty where nothing was.
    pub seeds: Vec<(String, u64)>,
}

/// A file that was read, with what tells it from every other.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct SourceFile {
    /// What the user calls it.
    pub name: String,
    /// What it was read as.
    pub role: &'static str,
    /// How many bytes it holds.
    pub bytes: u64,
    /// SHA-256 of its bytes (FIPS 180-4), in hexadecimal.
    pub sha256: String,
}

impl SourceFile {
    /// A file by its contents.
    #[must_use]
    pub fn of_bytes(name: &str, role: &'static str, bytes: &[u8]) -> Self {
        let digest = Digest::of(bytes).expect("bytes in memory can be read");
        Self::of_digest(name.to_owned(), role, digest)
    }

    /// A file by its path.
    ///
    /// # Errors
    /// Where it cannot be read, or is a pipe or a device, which gives its bytes only once.
    pub fn of_path(path: &Path, role: &'static str) -> io::Result<Self> {
        let file = File::open(path)?;
        if !file.metadata()?.is_file() {
            return Err(io::Error::other("it is no ordinary file and cannot be read twice"));
        }
        Ok(Self::of_digest(path.display().to_string(), role, Digest::of(file)?))
    }

    fn of_digest(name: String, role: &'static str, Digest { bytes, sha256 }: Digest) -> Self {
        Self { name, role, bytes, sha256 }
    }
}

/// Versions, seeds, files and the command.
pub(super) fn section(origin: &Origin, observed: &[Observed], method: &[String]) -> Section {
    let notes: Vec<String> = observed
        .iter()
        .flat_map(|one| one.recording.notes.iter().map(move |note| format!("{}: {note}", one.name)))
        .collect();
    let rows: Vec<Vec<Cell>> = origin
        .files
        .iter()
        .map(|file| {
            vec![
                Cell::text(&file.name),
                Cell::text(file.role),
                Cell::number(file.bytes.to_string()),
                Cell::text(&file.sha256),
            ]
        })
        .collect();
    let body = html! {
        dl {
            dt { "Program" } dd { "harness " (env!("CARGO_PKG_VERSION")) }
            dt { "Command" } dd { code { (origin.command) } }
            dt { "Chance" }
            @if origin.seeds.is_empty() {
                dd { "nothing was drawn at random: the same files and options give the same report, byte for byte" }
            }
            @for (what, seed) in &origin.seeds { dd { (what) ": seed " (seed) } }
        }
        @if !rows.is_empty() {
            div class="hashes" { (table("Files that were read", &["file", "read as", "bytes", "SHA-256"], &rows)) }
        }
        @if !notes.is_empty() {
            h3 { "What the reader of the recordings decided on its own" }
            ul { @for note in &notes { li { (note) } } }
        }
        @if !method.is_empty() {
            h3 { "How each figure is obtained" }
            ul { @for line in method { li { (line) } } }
        }
    };
    Section { id: "origin", heading: "How it was obtained".to_owned(), body }
}

#[cfg(test)]
mod tests {
    use std::io::Write;

    use super::*;

    /// FIPS 180-4's own example, published by NIST beside the standard: the message "abc".
    #[test]
    fn source_file_hash_of_abc_is_that_of_the_standard() {
        let expected = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
        assert_eq!(SourceFile::of_bytes("a", "recording", b"abc").sha256, expected);
        let mut file = tempfile::NamedTempFile::new().expect("a file");
        file.write_all(b"abc").expect("written");
        let read = SourceFile::of_path(file.path(), "recording").expect("readable");
        assert_eq!((read.sha256.as_str(), read.bytes), (expected, 3));
    }

    #[test]
    fn source_file_that_cannot_be_read_twice_is_refused() {
        assert!(SourceFile::of_path(Path::new("."), "recording").is_err());
    }
}
