//! The answer in Markdown, for a pull request.

use super::{Claim, Recheck, Standing};

/// All answers, each a heading and a table: the broken claims first.
#[must_use]
pub fn summary(answers: &[Recheck]) -> String {
    answers.iter().map(one).collect::<Vec<_>>().join("\n")
}

fn one(answer: &Recheck) -> String {
    let (broken, all) = (answer.broken(), answer.claims.len());
    let verdict = match broken {
        0 => format!("all {all} claims hold"),
        1 => format!("1 of {all} claims is broken"),
        more => format!("{more} of {all} claims are broken"),
    };
    let mut text = format!("### {}: {verdict}\n\n", plain(&answer.contact));
    text.push_str(&format!("`{}`\n\n", answer.requirement.replace(['`', '\n', '\r'], " ")));
    if let Some(caution) = answer.caution {
        text.push_str(&format!("**Caution:** {}\n\n", plain(caution)));
    }
    text.push_str("| | claim | found |\n| --- | --- | --- |\n");
    let rank = |claim: &&Claim| match claim.standing {
        Standing::Broken(_) => 0,
        Standing::Open(_) => 1,
        Standing::Holds(_) => 2,
    };
    let mut claims: Vec<&Claim> = answer.claims.iter().collect();
    claims.sort_by_key(rank);
    for claim in claims {
        let word = if claim.is_broken() { "**broken**" } else { claim.word() };
        let found: Vec<String> = claim.remarks().iter().map(|remark| plain(remark)).collect();
        text.push_str(&format!("| {word} | {} | {} |\n", plain(&claim.claimed), found.join("<br>")));
    }
    text
}

/// A text that means nothing to Markdown or HTML, on one line.
fn plain(text: &str) -> String {
    let mut plain = String::new();
    for letter in text.chars() {
        match letter {
            '<' => plain.push_str("&lt;"),
            '>' => plain.push_str("&gt;"),
            '&' => plain.push_str("&amp;"),
            '\\' | '|' | '*' | '_' | '`' | '[' | ']' | '#' | '~' | '@' => plain.extend(['\\', letter]),
            '\n' | '\r' | '\t' => plain.push(' '),
            other => plain.push(other),
        }
    }
    plain
}
