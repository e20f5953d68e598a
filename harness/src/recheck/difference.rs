//! Where two modules part.

/// Lines that are shown.
const SHOWN: usize = 3;

/// Every line where `shipped` parts from `made`, the first few shown; line endings do not count, nor does the layout of
/// the code, which the firmware's own `rustfmt` may change.
pub(super) fn differences(shipped: &str, made: &str) -> Vec<String> {
    if tokens(shipped) == tokens(made) {
        return Vec::new();
    }
    let (shipped, made): (Vec<&str>, Vec<&str>) = (shipped.lines().collect(), made.lines().collect());
    let same_before = shipped.iter().zip(&made).take_while(|(one, other)| one == other).count();
    if same_before == shipped.len() && same_before == made.len() {
        return Vec::new();
    }
    if shipped.len() != made.len() {
        let at = |lines: &[&str]| {
            lines.get(same_before).map_or("the end of the file".to_owned(), |line| quoted(line))
        };
        return vec![format!(
            "line {} is {}, the requirement gives {}; {} lines where the requirement gives {}",
            same_before + 1,
            at(&shipped),
            at(&made),
            shipped.len(),
            made.len()
        )];
    }
    let parted: Vec<usize> = (same_before..made.len()).filter(|&line| shipped[line] != made[line]).collect();
    let mut told: Vec<String> = parted
        .iter()
        .take(SHOWN)
        .map(|&line| {
            let (has, gives) = (quoted(shipped[line]), quoted(made[line]));
            format!("line {} is {has}, the requirement gives {gives}", line + 1)
        })
        .collect();
    if parted.len() > SHOWN {
        told.push(format!("and {} more lines", parted.len() - SHOWN));
    }
    told
}

/// The code without its layout. Comments stay as they are, line by line, so that none can swallow code unnoticed.
fn tokens(text: &str) -> String {
    let mut tokens = String::new();
    let is_word = |letter: char| letter.is_alphanumeric() || letter == '_';
    // What stands between the last letter and the next: nothing, white space, or a comma somewhere in it.
    let mut gap = None;
    for line in text.lines().map(str::trim) {
        if line.starts_with("//") {
            tokens.extend(["\n", line, "\n"]);
            gap = None;
            continue;
        }
        gap = gap.or(Some(' '));
        for letter in line.chars() {
            match letter {
                ',' => gap = Some(','),
                space if space.is_whitespace() => gap = gap.or(Some(' ')),
                other => {
                    let between = gap.take().filter(|_| is_word(other) && tokens.ends_with(is_word));
                    tokens.extend(between);
                    tokens.push(other);
                }
            }
        }
    }
    tokens
}

fn quoted(line: &str) -> String {
    format!("`{}`", line.trim())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn differences_of_the_same_lines_are_none_whatever_ends_them() {
        assert_eq!(differences("a\nb\n", "a\r\nb"), [""; 0]);
    }

    #[test]
    fn differences_of_layout_are_none_and_those_of_meaning_are_some() {
        let made =
            "const A: T = T::new(2, 2)\n    .quiet(4)\n    .calm(0);\n// a comment\nconst B: u8 = 1;\n";
        let other =
            "const A: T = T::new(\n    2,\n    2,\n).quiet(4).calm(0);\n\n// a comment\nconst B: u8 = 1;";
        assert_eq!(differences(other, made), [""; 0]);
        for (from, to) in [
            ("2, 2", "22"),
            ("2, 2", "2 2"),
            ("const B", "constB"),
            ("a comment\n", "a comment "),
            ("// a comment\n", ""),
            ("quiet(4)", "quiet(5)"),
        ] {
            let changed = made.replacen(from, to, 1);
            assert_ne!(differences(&changed, made), [""; 0], "{from} to {to}");
        }
    }

    #[test]
    fn differences_name_line_and_both_texts() {
        assert_eq!(differences("a\n  b\nc\n", "a\n  x\nc\n"), ["line 2 is `b`, the requirement gives `x`"]);
        let many = differences("1\n2\n3\n4\n5\n", "a\nb\nc\nd\ne\n");
        assert_eq!(many.len(), 4, "{many:?}");
        assert_eq!(many[3], "and 2 more lines");
    }

    #[test]
    fn differences_of_a_cut_or_longer_file_give_both_lengths() {
        let cut = differences("a\n", "a\nb\n");
        let end =
            "line 2 is the end of the file, the requirement gives `b`; 1 lines where the requirement gives 2";
        assert_eq!(cut, [end]);
        assert_eq!(differences("a\nz\nb\n", "a\nb\n").len(), 1);
    }
}
