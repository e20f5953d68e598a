//! The few facts that the checks read from a `Cargo.toml`, without a dependency for it.

/// The value of `key = "value"` in the table `[table]`.
pub(crate) fn string<'a>(text: &'a str, table: &str, key: &str) -> Option<&'a str> {
    entries(text, table).find(|(name, _)| *name == key)?.1.strip_prefix('"')?.split('"').next()
}

/// The words of `key = ["one", "two"]`, on one line, in the table `[table]`; none where there is no such key.
pub(crate) fn list<'a>(text: &'a str, table: &str, key: &str) -> Vec<&'a str> {
    let value = entries(text, table).find(|(name, _)| *name == key).map_or("", |(_, value)| value);
    value.split('"').skip(1).step_by(2).collect()
}

/// The features of a package, without `default`, in the order of the manifest.
pub(crate) fn features(text: &str) -> Vec<&str> {
    entries(text, "features").map(|(name, _)| name).filter(|name| *name != "default").collect()
}

/// The entries of one table. A line that goes on with an array, as `"dep:x",` does, has no key and is passed over.
fn entries<'a>(text: &'a str, table: &str) -> impl Iterator<Item = (&'a str, &'a str)> {
    let header = format!("[{table}]");
    let lines = text.lines().map(str::trim).skip_while(move |line| *line != header).skip(1);
    let lines = lines.take_while(|line| !is_header(line)).filter(|line| !line.starts_with(['#', '"']));
    lines.filter_map(|line| line.split_once('=')).map(|(name, value)| (name.trim(), value.trim()))
}

/// Whether a line opens a table; the last line of an array, `]` or `],`, does not.
fn is_header(line: &str) -> bool {
    line.starts_with('[')
}

#[cfg(test)]
mod tests {
    use super::*;

    const MANIFEST: &str = r#"
[package]
name = "thing"
rust-version = "1.90" # the lowest

[features]
default = []
# A comment = not a feature.
defmt = ["dep:defmt"]
embedded-hal = [
    "dep:embedded-hal",
    "dep:odd=name",
]
std = []

[dependencies]
serde = "1"
"#;

    #[test]
    fn features_lists_all_but_the_default() {
        assert_eq!(features(MANIFEST), ["defmt", "embedded-hal", "std"]);
    }

    #[test]
    fn features_of_a_manifest_without_any_is_empty() {
        assert!(features("[package]\nname = \"thing\"\n").is_empty());
    }

    #[test]
    fn list_holds_the_words_of_one_line() {
        assert_eq!(list(MANIFEST, "features", "defmt"), ["dep:defmt"]);
        assert_eq!(list(MANIFEST, "features", "std"), [""; 0]);
        assert_eq!(list("[package]\nkeywords = [\"a\", \"b\"]\n", "package", "keywords"), ["a", "b"]);
    }

    #[test]
    fn string_is_read_from_its_own_table_only() {
        assert_eq!(string(MANIFEST, "package", "rust-version"), Some("1.90"));
        assert_eq!(string(MANIFEST, "package", "serde"), None);
        assert_eq!(string(MANIFEST, "features", "std"), None);
    }
}
