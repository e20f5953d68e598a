//! The contrast of the page's own colours, computed from its style sheet.
//!
//! The formula is that of WCAG 2.2 (W3C Recommendation, 2023), terms "relative luminance" and "contrast ratio"; text
//! needs 4.5:1 (success criterion 1.4.3), and shapes that must be seen need 3:1 (1.4.11).

use std::collections::BTreeMap;

const STYLE: &str = include_str!("style.css");

type Scheme = BTreeMap<&'static str, [u8; 3]>;

/// The colours of each `:root` block, the later ones over the first.
fn schemes() -> Vec<Scheme> {
    let mut schemes: Vec<Scheme> = Vec::new();
    for block in STYLE.split(":root {").skip(1) {
        let mut scheme = schemes.first().cloned().unwrap_or_default();
        let lines = block.split('}').next().unwrap_or_default().split(';');
        scheme.extend(lines.filter_map(|line| {
            let (name, value) = line.trim().split_once(": #")?;
            let channel =
                |at: usize| u8::from_str_radix(&value[at..at + 2], 16).expect("a colour of six digits");
            Some((name, [channel(0), channel(2), channel(4)]))
        }));
        schemes.push(scheme);
    }
    schemes
}

fn luminance(colour: [u8; 3]) -> f64 {
    let linear = colour.map(|channel| {
        let channel = f64::from(channel) / 255.0;
        if channel <= 0.04045 { channel / 12.92 } else { ((channel + 0.055) / 1.055).powf(2.4) }
    });
    0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]
}

fn contrast(a: [u8; 3], b: [u8; 3]) -> f64 {
    let (a, b) = (luminance(a), luminance(b));
    (a.max(b) + 0.05) / (a.min(b) + 0.05)
}

/// The ends of the scale as the standard gives them, 1:1 and 21:1, and a grey whose ratio on white is often quoted.
#[test]
fn contrast_of_known_pairs_is_that_of_the_standard() {
    let (black, white) = ([0; 3], [255; 3]);
    assert!((contrast(black, white) - 21.0).abs() < 1e-9);
    assert!((contrast(white, white) - 1.0).abs() < 1e-9);
    // #767676 on white, 4.54 (common practice).
    assert!((contrast([0x76; 3], white) - 4.54).abs() < 0.005);
}

#[test]
fn colours_of_text_have_contrast_in_every_scheme() {
    let schemes = schemes();
    assert_eq!(schemes.len(), 3, "light, dark and paper");
    for (index, scheme) in schemes.iter().enumerate() {
        for text in ["--ink", "--soft", "--make", "--break", "--noise", "--good", "--alarm"] {
            for ground in ["--paper", "--panel"] {
                let ratio = contrast(scheme[text], scheme[ground]);
                assert!(ratio >= 4.5, "scheme {index}: {text} on {ground} is only {ratio:.2}:1");
            }
        }
        // The names of states stand in tinted boxes, letters on shaded stretches.
        for ground in ["--tint", "--shade"] {
            let ratio = contrast(scheme["--ink"], scheme[ground]);
            assert!(ratio >= 4.5, "scheme {index}: --ink on {ground} is only {ratio:.2}:1");
        }
    }
}

/// A colour that is not named could not be checked.
#[test]
fn style_sheet_uses_named_colours_only() {
    for line in STYLE.lines().filter(|line| !line.trim_start().starts_with("--") && !line.contains(":root")) {
        for property in ["color:", "fill:", "stroke:", "background:"] {
            for (at, _) in line.match_indices(property) {
                let value = line[at + property.len()..].split([';', '}']).next().unwrap_or_default().trim();
                let named = value.starts_with("var(--")
                    || ["none", "inherit", "currentColor", "url(#hatch)"].contains(&value);
                assert!(named, "\"{value}\" in: {line}");
            }
        }
        assert!(!line.contains('#') || line.contains("#hatch"), "{line}");
        assert!(!line.contains("opacity"), "it changes a colour that was checked: {line}");
    }
}
