//! Opens a recording: tells the formats apart by content, and says plainly what is no recording at all.

use std::fs::File;
use std::io::{self, Read};
use std::path::Path;

use super::channel::Channel;
use super::error::{Faults, ReadError};
use super::{ReadOptions, Recording, csv, recorder, vcd};
use crate::nearest::nearest;
use crate::problem::plain_reason;
use crate::raw_input::is_binary;

/// So much of a file is looked at to find out what it is.
pub(super) const PREFIX: usize = 1 << 16;

/// Reads the channel that the options name, or the only one, from a file.
///
/// # Errors
/// Everything that is wrong with the file, with its places.
pub fn read_path(path: impl AsRef<Path>, options: &ReadOptions) -> Result<Recording, ReadError> {
    read_path_through(path, options, |file| file)
}

/// As [`read_path`], with the file read through what `through` makes of it, such as a count of what is read.
///
/// # Errors
/// As [`read_path`].
pub fn read_path_through<R: Read>(
    path: impl AsRef<Path>,
    options: &ReadOptions,
    through: impl FnOnce(File) -> R,
) -> Result<Recording, ReadError> {
    let path = path.as_ref();
    let name = path.display().to_string();
    read_stream(&name, through(open(path, &name)?), options)
}

/// Reads several channels of a file in one pass, in the order of `channels`; `options.channel` is not used.
///
/// # Errors
/// Everything that is wrong with the file, with its places.
pub fn read_channels(
    path: impl AsRef<Path>,
    channels: &[&str],
    options: &ReadOptions,
) -> Result<Vec<Recording>, ReadError> {
    let path = path.as_ref();
    let name = path.display().to_string();
    if channels.is_empty() {
        return Ok(Vec::new());
    }
    read_any(&name, open(path, &name)?, channels, options)
}

/// Reads a recording from memory; `name` stands in messages where a path would.
///
/// # Errors
/// As [`read_path`].
pub fn read_bytes(name: &str, bytes: &[u8], options: &ReadOptions) -> Result<Recording, ReadError> {
    read_stream(name, bytes, options)
}

/// Reads a recording from a stream; `name` stands in messages where a path would.
///
/// # Errors
/// As [`read_path`].
pub fn read_stream(name: &str, input: impl Read, options: &ReadOptions) -> Result<Recording, ReadError> {
    let recordings = read_any(name, input, &[], options)?;
    recordings.into_iter().next().ok_or_else(|| {
        let mut faults = Faults::default();
        faults.whole_file("holds no recording");
        faults.into_error(name)
    })
}

/// The channels that a file offers, in the order of the file.
///
/// # Errors
/// As [`read_path`], as far as the declarations go.
pub fn list_channels(path: impl AsRef<Path>, options: &ReadOptions) -> Result<Vec<Channel>, ReadError> {
    let path = path.as_ref();
    let name = path.display().to_string();
    let mut faults = Faults::default();
    let channels = match sniff(open(path, &name)?, &mut faults) {
        Some((Format::Vcd, prefix, rest)) => vcd::channels(prefix.as_slice().chain(rest), &mut faults),
        Some((Format::Recorder, ..)) => recorder::channels(),
        Some((Format::Csv, prefix, _)) => csv::channels(&prefix, options, &mut faults),
        None => Vec::new(),
    };
    if faults.is_empty() { Ok(channels) } else { Err(faults.into_error(&name)) }
}

fn read_any(
    name: &str,
    input: impl Read,
    channels: &[&str],
    options: &ReadOptions,
) -> Result<Vec<Recording>, ReadError> {
    let mut faults = Faults::default();
    let recordings = match sniff(input, &mut faults) {
        Some((Format::Vcd, prefix, rest)) => {
            vcd::read(prefix.as_slice().chain(rest), channels, options, &mut faults)
        }
        Some((Format::Recorder, prefix, rest)) => {
            recorder::read(prefix.as_slice().chain(rest), channels, options, &mut faults)
        }
        Some((Format::Csv, prefix, rest)) => {
            csv::read(prefix.as_slice().chain(rest), &prefix, channels, options, &mut faults)
        }
        None => Vec::new(),
    };
    if faults.is_empty() { Ok(recordings) } else { Err(faults.into_error(name)) }
}

#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Format {
    Vcd,
    Csv,
    Recorder,
}

/// Reads the beginning and says what the file is; the byte order mark of UTF-8 is dropped.
fn sniff<R: Read>(mut input: R, faults: &mut Faults) -> Option<(Format, Vec<u8>, R)> {
    let mut prefix = Vec::new();
    if let Err(error) = (&mut input).take(PREFIX as u64).read_to_end(&mut prefix) {
        faults.io(error);
        return None;
    }
    if prefix.starts_with(b"\xef\xbb\xbf") {
        prefix.drain(..3);
    }
    match format_of(&prefix) {
        Ok(format) => Some((format, prefix, input)),
        Err((message, help)) => {
            faults.whole_file(message);
            faults.help(help);
            None
        }
    }
}

/// The format, or what is wrong and what to do.
fn format_of(prefix: &[u8]) -> Result<Format, (&'static str, &'static str)> {
    let packed = [&b"\x1f\x8b"[..], b"PK\x03\x04", b"BZh", b"\xfd7zXZ", b"\x28\xb5\x2f\xfd"];
    if packed.iter().any(|magic| prefix.starts_with(magic)) {
        return Err(("is a packed file", "unpack it first"));
    }
    if prefix.starts_with(b"\xff\xfe") || prefix.starts_with(b"\xfe\xff") {
        return Err(("is UTF-16 text", "save it as UTF-8 or ASCII"));
    }
    let Some(first) = prefix.iter().find(|byte| !byte.is_ascii_whitespace()) else {
        return Err(("is empty", "export the recording again, as VCD or CSV"));
    };
    if is_binary(prefix) {
        return Err(("is no text", "export the recording as VCD or CSV"));
    }
    if prefix.trim_ascii_start().starts_with(recorder::MAGIC) {
        return Ok(Format::Recorder);
    }
    // A VCD begins with a keyword; no CSV does. One without declarations begins with a time mark.
    let looks_like_mark = *first == b'#'
        && prefix.trim_ascii_start()[1..]
            .split(|byte| byte.is_ascii_whitespace())
            .next()
            .is_some_and(|digits| !digits.is_empty() && digits.iter().all(u8::is_ascii_digit));
    Ok(if *first == b'$' || looks_like_mark { Format::Vcd } else { Format::Csv })
}

fn open(path: &Path, name: &str) -> Result<File, ReadError> {
    let mut faults = Faults::default();
    match File::open(path) {
        // Opening a folder succeeds on some systems, reading from it never does.
        Ok(_) if path.is_dir() => {
            faults.whole_file("is a folder, not a recording");
            faults.help("name a file in it");
        }
        Ok(file) => return Ok(file),
        Err(error) if error.kind() == io::ErrorKind::NotFound => {
            faults.whole_file("there is no such file");
            faults.help(neighbour(path).map_or_else(
                || "check the path; a relative one begins at the current folder".to_owned(),
                |near| format!("did you mean {near}?"),
            ));
        }
        Err(error) => {
            faults.whole_file(format!("cannot be opened: {}", plain_reason(&error)));
            faults.help("make the file readable");
        }
    }
    Err(faults.into_error(name))
}

/// A file in the same folder whose name is nearly that of the missing one.
fn neighbour(path: &Path) -> Option<String> {
    let wanted = path.file_name()?.to_str()?;
    let folder = path.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or(Path::new("."));
    let mut names: Vec<String> =
        folder.read_dir().ok()?.flatten().filter_map(|entry| entry.file_name().into_string().ok()).collect();
    // The order of a folder is the system's own.
    names.sort();
    let near = nearest(wanted, names.iter().map(String::as_str))?;
    Some(path.with_file_name(near).display().to_string())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn refused(bytes: &[u8], message: &str) {
        let error = read_bytes("f", bytes, &ReadOptions::default()).expect_err("refused");
        assert_eq!(error.to_string(), format!("f: {message}"));
        assert!(error.help().is_some());
    }

    #[test]
    fn open_what_is_no_recording_is_named() {
        refused(b"", "is empty");
        refused(b" \r\n\t", "is empty");
        refused(b"\xef\xbb\xbf", "is empty");
        refused(b"\x1f\x8b\x08rest", "is a packed file");
        refused(b"PK\x03\x04rest", "is a packed file");
        refused(b"\xff\xfet\0", "is UTF-16 text");
        refused(b"\x7fELF\0\0\0\x01", "is no text");
        refused(&[7; 100], "is no text");
    }

    #[test]
    fn open_missing_file_suggests_the_nearest_name() {
        let folder = tempfile::tempdir().expect("a folder");
        std::fs::write(folder.path().join("door.csv"), "0,1\n").expect("writes");
        let error = read_path(folder.path().join("dor.csv"), &ReadOptions::default()).expect_err("missing");
        assert!(error.to_string().ends_with("dor.csv: there is no such file"), "{error}");
        assert!(error.help().expect("help").ends_with("door.csv?"));
    }

    #[test]
    fn open_folder_is_refused() {
        let folder = tempfile::tempdir().expect("a folder");
        let error = read_path(folder.path(), &ReadOptions::default()).expect_err("a folder");
        assert!(error.to_string().ends_with(": is a folder, not a recording"), "{error}");
    }

    #[test]
    fn open_format_goes_by_content_not_by_name() {
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("recording.csv");
        std::fs::write(&path, "$timescale 1us $end $var wire 1 ! a $end $enddefinitions $end #0 0! #5 1! #9")
            .expect("writes");
        let recording = read_path(&path, &ReadOptions::default()).expect("a VCD");
        assert_eq!(recording.trace.edges(), [5_000]);
        assert_eq!(list_channels(&path, &ReadOptions::default()).expect("a VCD")[0].name, "a");
    }

    #[test]
    fn open_read_error_midway_is_reported() {
        struct Breaks;
        impl Read for Breaks {
            fn read(&mut self, _: &mut [u8]) -> io::Result<usize> {
                Err(io::Error::other("Cable pulled"))
            }
        }
        let start = b"$timescale 1us $end $var wire 1 ! a $end $enddefinitions $end #0 0! ";
        let mut long = start.to_vec();
        long.resize(PREFIX + 1, b' ');
        let error = read_stream("f", long.chain(Breaks), &ReadOptions::default()).expect_err("broken");
        assert_eq!(error.to_string(), "f: cannot be read: cable pulled");
    }
}
