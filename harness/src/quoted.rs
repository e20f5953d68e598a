//! Pieces of input in messages.

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
    fn quoted_long_or_strange_input_stays_short_and_printable() {
        assert_eq!(quoted("größe"), "\"größe\"");
        assert_eq!(quoted(b"a\x00\"b"), "\"a\\0\\\"b\"");
        assert_eq!(quoted([b'y'; 1000]), format!("\"{}...\"", "y".repeat(32)));
        let wide = "\u{1f600}".repeat(32);
        assert_eq!(quoted(&wide), format!("\"{wide}\""));
        assert_eq!(quoted(wide.clone() + "!"), format!("\"{wide}...\""));
    }
}
