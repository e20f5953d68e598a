//! Input as it came: whether it is text at all, and how pieces of it are shown in messages.

/// Whether these bytes are no text. A stray control character does not make them so: that is for a reader to find,
/// with its place.
pub(crate) fn is_binary(bytes: &[u8]) -> bool {
    let is_odd = |&&byte: &&u8| byte < b' ' && !byte.is_ascii_whitespace() && byte != 0x0b;
    bytes.contains(&0) || bytes.iter().filter(is_odd).count() > bytes.len() / 32
}

/// A piece of input for a message: quoted, printable, and short.
pub(crate) fn quoted(input: impl AsRef<[u8]>) -> String {
    const SHOWN: usize = 32;
    let bytes = input.as_ref();
    // No character takes more than four bytes, so what is cut off here is not shown anyway.
    let text = String::from_utf8_lossy(&bytes[..bytes.len().min(4 * SHOWN)]);
    let mut shown: String = text.chars().take(SHOWN).flat_map(char::escape_debug).collect();
    if text.chars().count() > SHOWN || bytes.len() > 4 * SHOWN {
        shown.push_str("...");
    }
    format!("\"{shown}\"")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn binary_bytes_are_told_from_text_with_a_stray_character() {
        assert!(!is_binary(b""));
        assert!(!is_binary(b"time,gate\r\n\t0,1\x0b\n"));
        assert!(is_binary(b"time,gate\n0,\0"));
        let text = |odd: usize| [vec![b'a'; 64 - odd], vec![7; odd]].concat();
        assert!(!is_binary(&text(2)));
        assert!(is_binary(&text(3)));
    }

    #[test]
    fn quoted_long_or_strange_input_stays_short_and_printable() {
        assert_eq!(quoted("größe"), "\"größe\"");
        assert_eq!(quoted(b"a\x00\"b"), "\"a\\0\\\"b\"");
        assert_eq!(quoted([b'y'; 1000]), format!("\"{}...\"", "y".repeat(32)));
        let wide = "\u{1f600}".repeat(32);
        assert_eq!(quoted(&wide), format!("\"{wide}\""));
        assert_eq!(quoted(wide.clone() + "!"), format!("\"{wide}...\""));
    }
}
