//! What the answer looks like where names mean something to Markdown or XML.

use super::*;

fn answer(standing: Standing) -> Recheck {
    let claims = vec![
        Claim::new(Subject::Proof, "holds | <b> & *all*", Standing::Holds("seen\u{1b}[1m".to_owned())),
        Claim::new(Subject::Latency, "a make is in time", standing),
    ];
    Recheck {
        requirement: "a`b.toml".to_owned(),
        contact: "gate <1>".to_owned(),
        claims,
        recordings: Vec::new(),
        caution: Some("mind the gap"),
    }
}

#[test]
fn markdown_means_only_what_it_should() {
    let text = markdown::summary(&[answer(Standing::Open("later".to_owned()))]);
    let expected = "\
### gate &lt;1&gt;: all 2 claims hold

`a b.toml`

**Caution:** mind the gap

| | claim | found |
| --- | --- | --- |
| open | a make is in time | later |
| holds | holds \\| &lt;b&gt; &amp; \\*all\\* | seen\u{1b}\\[1m |
";
    assert_eq!(text, expected);
}

#[test]
fn junit_counts_each_standing_and_leaves_out_control_codes() {
    let broken = answer(Standing::Broken(vec!["off by 1\u{1b}[1m".to_owned(), "and more".to_owned()]));
    let text = junit::answers(&[broken, answer(Standing::Open("later".to_owned()))]).unwrap();
    assert!(
        text.contains("<testsuites name=\"harness recheck\" tests=\"4\" failures=\"1\" errors=\"0\">"),
        "{text}"
    );
    assert!(text.contains(" tests=\"2\" skipped=\"1\" errors=\"0\" failures=\"0\""), "{text}");
    assert!(!text.contains('\u{1b}') && text.contains("off by 1\nand more"), "{text}");
}

#[test]
fn recheck_holds_only_without_a_broken_claim() {
    assert!(answer(Standing::Holds(String::new())).holds());
    assert!(answer(Standing::Open(String::new())).holds());
    assert!(!answer(Standing::Broken(Vec::new())).holds());
}
