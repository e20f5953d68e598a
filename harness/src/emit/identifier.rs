//! Rust names from whatever a contact is called.

/// Names of the generated module that a contact must not take.
const TAKEN: &[&str] = &[
    "Self",
    "Bounds",
    "Clock",
    "Config",
    "ConstLaw",
    "Debouncer",
    "Envelope",
    "Integrator",
    "Latency",
    "Law",
    "MajorityRegister",
    "None",
    "PerChange",
    "Period",
    "Position",
    "Running",
    "ShiftRegister",
    "Some",
    "Starting",
    "StartingDebouncer",
    "StateMachine",
    "StateMachineParameters",
    "TickClock",
    "Verdict",
];

/// Words that cannot name a module: the keywords of every edition, reserved ones included, and file names that
/// mean something else.
const KEYWORDS: &[&str] = &[
    "abstract", "as", "async", "await", "become", "box", "break", "const", "continue", "crate", "do", "dyn",
    "else", "enum", "extern", "false", "final", "fn", "for", "gen", "if", "impl", "in", "let", "lib", "loop",
    "macro", "main", "match", "mod", "move", "mut", "override", "priv", "pub", "ref", "return", "self",
    "static", "struct", "super", "trait", "true", "try", "type", "typeof", "union", "unsafe", "unsized",
    "use", "virtual", "where", "while", "yield", "alloc", "core", "std", "test",
];

/// Most letters of a name, so that generated lines stay within their width.
const LONGEST: usize = 32;

/// The type of a contact: `SluiceGateUpperEnd` for "sluice gate, upper end".
#[must_use]
pub fn type_name(contact: &str) -> String {
    let capital = |word: &String| {
        let (first, rest) = word.split_at(1);
        first.to_ascii_uppercase() + rest
    };
    let name: String = words(contact).iter().map(capital).collect();
    if name.is_empty() || name.starts_with(|first: char| first.is_ascii_digit()) {
        return format!("Contact{name}");
    }
    if TAKEN.contains(&name.as_str()) { name + "Contact" } else { name }
}

/// The module of a contact: `sluice_gate_upper_end` for "sluice gate, upper end".
#[must_use]
pub fn module_name(contact: &str) -> String {
    let name = words(contact).join("_");
    if name.is_empty() {
        return "contact".to_owned();
    }
    if name.starts_with(|first: char| first.is_ascii_digit()) {
        return format!("contact_{name}");
    }
    if KEYWORDS.contains(&name.as_str()) { name + "_contact" } else { name }
}

/// The words of a name in lower case, letters and digits of ASCII only.
fn words(contact: &str) -> Vec<String> {
    let mut words = vec![String::new()];
    let mut before = ' ';
    for character in contact.chars() {
        let plain = plain_letters(character);
        // "upperEnd" is two words, "LED" and "Über" are one.
        let inner_capital = character.is_uppercase() && before.is_lowercase();
        if plain.is_empty() || inner_capital {
            words.push(String::new());
        }
        if let Some(word) = words.last_mut() {
            word.push_str(&plain);
        }
        before = character;
    }
    words.retain(|word| !word.is_empty());
    shortened(words)
}

/// Whole words from the front, up to [`LONGEST`] letters; a first word longer than that is cut.
fn shortened(words: Vec<String>) -> Vec<String> {
    let mut left = LONGEST;
    let mut kept = Vec::new();
    for mut word in words {
        if word.len() > left && !kept.is_empty() {
            break;
        }
        word.truncate(left);
        left -= word.len();
        kept.push(word);
    }
    kept
}

/// A character in plain letters: itself, the usual spelling without its mark, or nothing.
fn plain_letters(character: char) -> String {
    let lower: Vec<char> = character.to_lowercase().collect();
    let plain = match lower.as_slice() {
        [letter] if letter.is_ascii_alphanumeric() => return letter.to_string(),
        ['ä' | 'æ'] => "ae",
        ['ö' | 'œ' | 'ø'] => "oe",
        ['ü'] => "ue",
        ['ß'] => "ss",
        ['à' | 'á' | 'â' | 'ã' | 'å' | 'ą'] => "a",
        ['ç' | 'ć' | 'č'] => "c",
        ['è' | 'é' | 'ê' | 'ë' | 'ę' | 'ě'] => "e",
        ['ì' | 'í' | 'î' | 'ï'] => "i",
        ['ł'] => "l",
        ['ñ' | 'ń' | 'ň'] => "n",
        ['ò' | 'ó' | 'ô' | 'õ'] => "o",
        ['ř'] => "r",
        ['ś' | 'š'] => "s",
        ['ù' | 'ú' | 'û' | 'ů'] => "u",
        ['ý' | 'ÿ'] => "y",
        ['ź' | 'ż' | 'ž'] => "z",
        _ => "",
    };
    plain.to_owned()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(contact: &str, type_: &str, module: &str) {
        assert_eq!(
            (type_name(contact).as_str(), module_name(contact).as_str()),
            (type_, module),
            "for {contact}"
        );
    }

    #[test]
    fn identifiers_from_any_name_are_safe() {
        check("sluice gate, upper end", "SluiceGateUpperEnd", "sluice_gate_upper_end");
        check("upperEnd", "UpperEnd", "upper_end");
        check("LED key", "LedKey", "led_key");
        check("Türöffner größe", "TueroeffnerGroesse", "tueroeffner_groesse");
        check("Über", "Ueber", "ueber");
        check("24 V door", "Contact24VDoor", "contact_24_v_door");
        check("дверь", "Contact", "contact");
        check("", "Contact", "contact");
        check("\"; fn evil() {} //", "FnEvil", "fn_evil");
        check("fn", "Fn", "fn_contact");
        check("self", "SelfContact", "self_contact");
        check(
            "the lower end switch of the northern sluice gate",
            "TheLowerEndSwitchOfTheNorthern",
            "the_lower_end_switch_of_the_northern",
        );
        check(&"x".repeat(40), &("X".to_owned() + &"x".repeat(31)), &"x".repeat(32));
        check("law", "LawContact", "law");
        check("state machine", "StateMachineContact", "state_machine");
        check("a\u{202e}b\n", "AB", "a_b");
    }
}
