//! Lays code out as `rustfmt` with its default settings would, for the few shapes that are needed.

/// Widest line.
const LINE: usize = 100;
/// Widest chain of calls, and widest list of arguments, on one line.
const CHAIN: usize = 60;
/// Widest struct literal on one line, without its braces.
const LITERAL: usize = 18;

/// `left = head.call().call();`, on one line if it is short.
pub(super) fn chain(left: &str, head: &str, calls: &[String]) -> String {
    let flat = format!("{head}{}", calls.concat());
    if flat.len() <= CHAIN && left.len() + 4 + flat.len() <= LINE {
        return format!("{left} = {flat};\n");
    }
    let calls: String = calls.iter().map(|call| format!("\n    {call}")).collect();
    format!("{left} = {head}{calls};\n")
}

/// `const _: () = assert!(all of the conditions, "message");`
///
/// The message is longer than a line of arguments may be, so that one shape fits all.
pub(super) fn assertion(conditions: &[String], message: &str) -> String {
    debug_assert!(message.len() + 6 > CHAIN && message.len() + 6 <= LINE, "{message}");
    let flat = conditions.join(" && ");
    let condition = if 4 + flat.len() < LINE { flat } else { conditions.join("\n        && ") };
    format!("const _: () = assert!(\n    {condition},\n    \"{message}\"\n);\n")
}

/// `Name { a: 1, b: 2 }`, indented by `indent` where it takes several lines.
pub(super) fn literal(name: &str, fields: &[String], indent: usize) -> String {
    let flat = fields.join(", ");
    if flat.len() <= LITERAL {
        return format!("{name} {{ {flat} }}");
    }
    let (outer, inner) = (" ".repeat(indent), " ".repeat(indent + 4));
    let lines: String = fields.iter().map(|field| format!("{inner}{field},\n")).collect();
    format!("{name} {{\n{lines}{outer}}}")
}

/// A number with its digits in groups of three.
pub(super) fn grouped(number: u64) -> String {
    let digits = number.to_string();
    let mut text = String::new();
    for (index, digit) in digits.chars().enumerate() {
        if index > 0 && (digits.len() - index).is_multiple_of(3) {
            text.push('_');
        }
        text.push(digit);
    }
    text
}

/// Text that may stand in a comment: one line, and nothing that would change its direction.
pub(super) fn comment(text: &str) -> String {
    let turns = |character: char| matches!(character, '\u{200e}' | '\u{200f}' | '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}');
    let kept = text.chars().filter(|&character| !turns(character));
    let spaced: String = kept
        .map(|character| if character.is_control() || character.is_whitespace() { ' ' } else { character })
        .collect();
    spaced.split(' ').filter(|word| !word.is_empty()).collect::<Vec<_>>().join(" ")
}

/// A paragraph behind a comment mark, in lines of at most 100 columns where words allow.
pub(super) fn paragraph(mark: &str, text: &str) -> String {
    let mut lines = String::new();
    let mut line = mark.to_owned();
    for word in text.split(' ') {
        if line.len() > mark.len() && line.chars().count() + 1 + word.chars().count() > LINE {
            lines.push_str(&line);
            lines.push('\n');
            line = mark.to_owned();
        }
        line.push(' ');
        line.push_str(word);
    }
    lines + &line + "\n"
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn layout_groups_digits() {
        assert_eq!(grouped(0), "0");
        assert_eq!(grouped(999), "999");
        assert_eq!(grouped(1_000), "1_000");
        assert_eq!(grouped(12_345_678), "12_345_678");
    }

    #[test]
    fn layout_comment_is_one_harmless_line() {
        assert_eq!(comment("a\nb\u{202e} c\t d\u{7}"), "a b c d");
        assert_eq!(comment("größe"), "größe");
    }
}
