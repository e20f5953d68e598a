//! Every command in the guide and in the README runs, and prints what is shown.
//!
//! A page is run from top to bottom in a folder of its own. Its blocks:
//! * `sh`: comments, and lines `harness ...`. A line `# exit code 1` stands below a command that ends with 1; all
//!   others end with 0.
//! * `text` directly below `sh`: what the commands of that block print, all of it; a line `...` stands for any lines.
//! * `toml`, `csv` and others of [`FILES`]: a file of that name, as in "toml contact.toml", written before what follows.
//! * `rust`: left to rustdoc.
//!
//! After a change to the output, write the blocks anew with `HARNESS_REWRITE_GUIDE=1 cargo test -p harness --test
//! guide`, and look at what changed. Blocks with `...` are to be mended by hand.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};
use std::{env, fs};

/// What a block can be that shows a file.
const FILES: [&str; 4] = ["toml", "csv", "kiss2", "edges"];

/// Languages that are for the eye, or for rustdoc.
const OTHERS: [&str; 1] = ["rust"];

/// A fenced block: what stands behind the fence, its lines without the indentation of the fence, and where.
#[derive(Clone, PartialEq, Eq, Debug)]
struct Block {
    info: String,
    lines: Vec<String>,
    /// The line of the opening fence, from 0.
    at: usize,
    indent: usize,
    /// Whether only blank lines stand between this and the block before.
    follows: bool,
}

fn blocks(text: &str) -> Vec<Block> {
    let mut blocks: Vec<Block> = Vec::new();
    let mut open: Option<Block> = None;
    let mut follows = false;
    for (at, line) in text.lines().enumerate() {
        let bare = line.trim_start();
        match (&mut open, bare.strip_prefix("```")) {
            (None, Some(info)) => {
                let info = info.trim().to_owned();
                open = Some(Block { info, lines: Vec::new(), at, indent: line.len() - bare.len(), follows });
            }
            (Some(_), Some("")) => {
                blocks.extend(open.take());
                follows = true;
            }
            (Some(block), _) => block.lines.push(line.get(block.indent..).unwrap_or("").to_owned()),
            (None, None) => follows &= bare.is_empty(),
        }
    }
    assert_eq!(open, None, "a block is not closed");
    blocks
}

/// The words of a command line: split at spaces, double quotes hold together.
fn words(line: &str) -> Vec<String> {
    assert!(!line.contains(['\'', '$', '|', '>', '<', '&', ';', '*', '`']), "the shell is not asked: {line}");
    let mut words = Vec::new();
    for (index, part) in line.split('"').enumerate() {
        if index % 2 == 1 {
            words.push(part.to_owned());
        } else {
            words.extend(part.split_whitespace().map(str::to_owned));
        }
    }
    assert_eq!(line.matches('"').count() % 2, 0, "a quote is not closed: {line}");
    words
}

/// The commands of a block with the exit code that each ends with.
fn commands(lines: &[String]) -> Vec<(String, i32)> {
    let mut commands: Vec<(String, i32)> = Vec::new();
    let mut begun = String::new();
    for line in lines {
        if let Some(code) = line.strip_prefix("# exit code ") {
            commands.last_mut().expect("a command above").1 = code.parse().expect("a number");
        } else if !line.trim().is_empty() && !line.starts_with('#') {
            begun.push_str(line);
            match begun.strip_suffix('\\') {
                Some(rest) => begun = rest.to_owned(),
                None => commands.push((std::mem::take(&mut begun), 0)),
            }
        }
    }
    assert!(begun.is_empty(), "a command goes on after the end of its block: {begun}");
    commands
}

/// Whether `shown`, in which a line `...` stands for any lines, is what was printed.
fn agrees(shown: &[String], printed: &[&str]) -> bool {
    match shown.split_first() {
        None => printed.is_empty(),
        Some((first, rest)) if first == "..." => {
            (0..=printed.len()).any(|from| agrees(rest, &printed[from..]))
        }
        Some((first, rest)) => printed.first() == Some(&first.as_str()) && agrees(rest, &printed[1..]),
    }
}

fn run(folder: &Path, arguments: &[String]) -> Output {
    let mut command = Command::new(env!("CARGO_BIN_EXE_harness"));
    for name in ["CLICOLOR", "CLICOLOR_FORCE"] {
        command.env_remove(name);
    }
    command.args(arguments).current_dir(folder).env("COLUMNS", "90").env("NO_COLOR", "1");
    command.stdin(Stdio::null()).output().expect("the command runs")
}

/// One page: a text, or a section of one, and the file that it stands in.
struct Page {
    path: PathBuf,
    /// The heading below which everything counts, up to the next of the same level; all of the file without it.
    section: Option<&'static str>,
}

impl Page {
    fn blocks(&self, text: &str) -> Vec<Block> {
        let all = blocks(text);
        let Some(heading) = self.section else { return all };
        let begin = text.lines().position(|line| line == heading).expect("the section is there");
        let end = text.lines().skip(begin + 1).position(|line| line.starts_with("## "));
        let end = end.map_or(usize::MAX, |length| begin + 1 + length);
        all.into_iter().filter(|block| (begin..end).contains(&block.at)).collect()
    }

    /// Runs all of it; gives what should stand in place of blocks that show something else.
    fn run(&self) -> (usize, BTreeMap<usize, (Block, String)>, Vec<String>) {
        let name = self.path.file_name().expect("a file").display().to_string();
        let text = fs::read_to_string(&self.path).expect("the page is there");
        let folder = tempfile::tempdir().expect("a folder");
        let (mut printed, mut is_fresh) = (String::new(), false);
        let (mut count, mut other, mut faults) = (0, BTreeMap::new(), Vec::new());
        for block in self.blocks(&text) {
            let place = format!("{name}:{}", block.at + 1);
            let (kind, rest) = block.info.split_once(' ').unwrap_or((block.info.as_str(), ""));
            match kind {
                "sh" => {
                    printed.clear();
                    for (line, code) in commands(&block.lines) {
                        let words = words(&line);
                        assert_eq!(words[0], "harness", "{place}: what should run this? {line}");
                        let output = run(folder.path(), &words[1..]);
                        let stderr = String::from_utf8_lossy(&output.stderr);
                        if output.status.code() != Some(code) {
                            faults.push(format!("{place}: {line}\nends with {}\n{stderr}", output.status));
                        }
                        printed.push_str(&String::from_utf8(output.stdout).expect("text"));
                        count += 1;
                    }
                }
                "text" if block.follows && is_fresh => {
                    let lines: Vec<&str> = printed.lines().collect();
                    if !agrees(&block.lines, &lines) {
                        other.insert(block.at, (block.clone(), printed.clone()));
                    }
                }
                "text" => faults.push(format!("{place}: no command stands above what is shown")),
                file if FILES.contains(&file) => {
                    let is_plain = !rest.is_empty() && !rest.contains(['/', '\\', ' ']);
                    assert!(
                        is_plain,
                        "{place}: the block needs the name of a file, as in \"toml contact.toml\""
                    );
                    fs::write(folder.path().join(rest), block.lines.join("\n") + "\n").expect("a file");
                }
                kind => assert!(OTHERS.contains(&kind), "{place}: a block of an unknown kind: {kind:?}"),
            }
            is_fresh = kind == "sh";
        }
        (count, other, faults)
    }
}

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("..")
}

/// The files of the guide, by name.
fn guide() -> Vec<PathBuf> {
    let entries = fs::read_dir(root().join("harness/guide")).expect("the guide");
    let mut files: Vec<PathBuf> = entries.map(|entry| entry.expect("an entry").path()).collect();
    files.sort();
    files
}

fn pages() -> Vec<Page> {
    let mut pages: Vec<Page> = guide().into_iter().map(|path| Page { path, section: None }).collect();
    pages.push(Page { path: root().join("README.md"), section: Some("## With your own contact") });
    pages
}

/// The text with other lines in place of some blocks.
fn rewritten(text: &str, blocks: &BTreeMap<usize, (Block, String)>) -> String {
    let mut new = String::new();
    let mut lines = text.lines().enumerate();
    while let Some((at, line)) = lines.next() {
        new.push_str(line);
        new.push('\n');
        let Some((block, printed)) = blocks.get(&at) else { continue };
        for line in printed.lines() {
            new.push_str(&" ".repeat(if line.is_empty() { 0 } else { block.indent }));
            new.push_str(line);
            new.push('\n');
        }
        // What is left of the old block, but for its last fence.
        for _ in 0..block.lines.len() {
            lines.next();
        }
    }
    new
}

/// What a page shows in place of what is printed is written anew when that is asked for, else told.
fn check(page: &Page) -> (usize, Vec<String>) {
    let (count, other, mut faults) = page.run();
    if env::var_os("HARNESS_REWRITE_GUIDE").is_some() {
        let text = fs::read_to_string(&page.path).expect("the page is there");
        fs::write(&page.path, rewritten(&text, &other)).expect("the page can be written");
    } else {
        faults.extend(other.into_values().map(|(block, printed)| {
            format!(
                "{}:{} shows\n{}\nbut this is printed:\n{printed}",
                page.path.display(),
                block.at + 1,
                block.lines.join("\n")
            )
        }));
    }
    (count, faults)
}

#[test]
fn guide_commands_run_and_print_what_is_shown() {
    let pages = pages();
    // The pages share nothing; two at a time keep two cores busy.
    let (first, second) = pages.split_at(pages.len() / 2);
    let answers: Vec<(usize, Vec<String>)> = std::thread::scope(|scope| {
        let halves = [first, second].map(|half| scope.spawn(|| half.iter().map(check).collect::<Vec<_>>()));
        halves.into_iter().flat_map(|half| half.join().expect("a page that can be run")).collect()
    });
    let faults: Vec<String> = answers.iter().flat_map(|(_, faults)| faults.clone()).collect();
    assert!(faults.is_empty(), "{}", faults.join("\n\n"));
    // Were the blocks not found any more, nothing would be tested.
    let count: usize = answers.iter().map(|(count, _)| count).sum();
    assert!(count >= 30, "only {count} commands were found");
}

/// Every page is part of the crate's documentation, and in the order of its contents.
#[test]
fn guide_pages_are_all_included_and_linked() {
    let module = fs::read_to_string(root().join("harness/src/guide.rs")).expect("the module of the guide");
    let contents = fs::read_to_string(root().join("harness/guide/README.md")).expect("the contents");
    for path in guide() {
        let name = path.file_name().expect("a file").display().to_string();
        assert!(module.contains(&format!("\"../guide/{name}\"")), "{name} is not in guide.rs");
        assert!(
            name == "README.md" || contents.contains(&format!("]: {name}")),
            "{name} is not in the contents"
        );
    }
}

/// What the links of a page lead to in the repository is there, and in the documentation a page of its own.
#[test]
fn guide_links_lead_to_files_that_are_there() {
    let module = fs::read_to_string(root().join("harness/src/guide.rs")).expect("the module of the guide");
    let mut count = 0;
    for page in guide() {
        let text = fs::read_to_string(&page).expect("a page");
        let place = page.display();
        let definitions: BTreeMap<&str, &str> =
            text.lines().filter_map(|line| line.strip_prefix('[')?.split_once("]: ")).collect();
        for (name, file) in &definitions {
            assert!(page.with_file_name(file).exists(), "{place}: {file}");
            assert!(
                ["crate::guide", "debounce_core"]
                    .iter()
                    .any(|home| module.contains(&format!("[{name}]: {home}::{name}\n"))),
                "{place}: {name}"
            );
            assert!(text.contains(&format!("][{name}]")), "{place}: nothing leads to {name}");
            count += 1;
        }
        for name in text.split("][").skip(1).filter_map(|rest| rest.split(']').next()) {
            assert!(definitions.contains_key(name), "{place}: where does {name} lead?");
        }
    }
    assert!(count > guide().len(), "only {count} links were found");
}

/// The options that the text names between the blocks are there.
#[test]
fn guide_names_only_options_that_there_are() {
    let mut known: BTreeMap<String, String> = BTreeMap::new();
    let mut texts: Vec<PathBuf> = guide();
    texts.push(root().join("README.md"));
    for path in texts {
        let text = fs::read_to_string(&path).expect("a page");
        let spans = text.split('`').skip(1).step_by(2).filter(|span| span.starts_with("harness "));
        for span in spans {
            let span = span.replace('\n', " ");
            let mut parts = span.split_whitespace().skip(1);
            let Some(command) = parts.next().filter(|word| word.starts_with(char::is_lowercase)) else {
                continue;
            };
            let help = known.entry(command.to_owned()).or_insert_with(|| {
                let output = run(&root(), &[command.to_owned(), "--help".to_owned()]);
                assert!(output.status.success(), "{}: there is no `harness {command}`", path.display());
                String::from_utf8(output.stdout).expect("text")
            });
            for option in parts.filter(|part| part.starts_with("--")) {
                let is_there =
                    help.split(|c: char| !(c.is_alphanumeric() || c == '-')).any(|word| word == option);
                assert!(is_there, "{}: `{span}`: no option {option}", path.display());
            }
        }
    }
}

#[test]
fn blocks_are_read_with_their_names_and_what_they_follow() {
    let text = "a\n\n  ```sh\n  harness x \\\n    --y\n  # exit code 1\n  ```\n\n  ```text\n  out\n  ```\nb\n```text\n```\n";
    let found = blocks(text);
    assert_eq!(found.iter().map(|block| block.follows).collect::<Vec<_>>(), [false, true, false]);
    assert_eq!(commands(&found[0].lines), [("harness x   --y".to_owned(), 1)]);
    assert_eq!(found[1].lines, ["out"]);
    let other = BTreeMap::from([(found[1].at, (found[1].clone(), "new\n\nmore\n".to_owned()))]);
    assert!(rewritten(text, &other).contains("  ```text\n  new\n\n  more\n  ```\nb\n"));
}

#[test]
fn agrees_takes_dots_for_any_lines_and_nothing_else() {
    let lines = |text: &str| text.lines().map(str::to_owned).collect::<Vec<_>>();
    assert!(agrees(&lines("a\n...\nd"), &["a", "b", "c", "d"]));
    assert!(agrees(&lines("..."), &[]));
    assert!(!agrees(&lines("a\n...\nd"), &["a", "b"]));
    assert!(!agrees(&lines("a"), &["a", "b"]));
}
