//! The frame of a report: head, contents, sections, foot.

use maud::{DOCTYPE, Markup, PreEscaped, html};

use super::caution;

const STYLE: &str = include_str!("style.css");
const SCRIPT: &str = include_str!("zoom.js");

/// Nothing may be fetched, not even by accident: a browser refuses what this does not name.
const POLICY: &str = "default-src 'none'; style-src 'unsafe-inline'; script-src 'unsafe-inline'";

/// A part of a report, under a heading of its own.
#[derive(Clone, Debug)]
pub struct Section {
    /// Its name in links; unique in the page.
    pub id: &'static str,
    /// The heading, short enough for the margin.
    pub heading: String,
    /// Everything below the heading.
    pub body: Markup,
}

/// A report.
#[derive(Clone, Debug)]
pub struct Page {
    /// What it is about.
    pub title: String,
    /// What sort of report it is, in a few words.
    pub kind: String,
    /// Whether everything in it is invented.
    pub invented: bool,
    /// The cautions for the role of the contact and its wiring; they come before everything else.
    pub cautions: Vec<&'static str>,
    /// The answer: what stands first.
    pub answer: Markup,
    /// The rest, in order.
    pub sections: Vec<Section>,
}

impl Page {
    /// The whole file.
    #[must_use]
    pub fn html(&self) -> String {
        let page = html! {
            (DOCTYPE)
            html lang="en" {
                head {
                    meta charset="utf-8";
                    meta http-equiv="Content-Security-Policy" content=(POLICY);
                    meta name="viewport" content="width=device-width, initial-scale=1";
                    meta name="color-scheme" content="light dark";
                    title { (self.title) ": " (self.kind) }
                    style { (PreEscaped(STYLE)) }
                }
                body {
                    (patterns())
                    a class="skip" href="#answer" { "Skip to the answer" }
                    (self.head())
                    main {
                        section id="answer" aria-labelledby="answer-heading" {
                            h2 id="answer-heading" { "Answer" }
                            div class="body" { (self.answer) }
                        }
                        @for section in &self.sections { (drawn(section)) }
                    }
                    footer {
                        p { (caution::GENERAL) }
                        p { "Written by harness " (env!("CARGO_PKG_VERSION")) "." }
                    }
                    script { (PreEscaped(SCRIPT)) }
                }
            }
        };
        page.into_string() + "\n"
    }

    fn head(&self) -> Markup {
        html! {
            header {
                p class="kind" {
                    (self.kind)
                    @if self.invented { " " strong class="invented" { "Demonstration: everything here is invented" } }
                }
                h1 { (self.title) }
                @for caution in &self.cautions { (caution::for_role(caution)) }
                nav aria-label="Contents" {
                    ul {
                        li { a href="#answer" { "Answer" } }
                        @for section in &self.sections {
                            li { a href={ "#" (section.id) } { (section.heading) } }
                        }
                    }
                }
            }
        }
    }
}

/// What shapes in any picture may be filled with.
fn patterns() -> Markup {
    html! {
        svg xmlns="http://www.w3.org/2000/svg" class="patterns" width="0" height="0" aria-hidden="true" {
            defs {
                pattern id="hatch" width="6" height="6" patternUnits="userSpaceOnUse" {
                    rect width="6" height="6" {}
                    path d="M-1 1l2 -2M0 6l6 -6M5 7l2 -2" {}
                }
            }
        }
    }
}

fn drawn(section: &Section) -> Markup {
    let heading = format!("{}-heading", section.id);
    html! {
        section id=(section.id) aria-labelledby=(heading) {
            h2 id=(heading) { (section.heading) }
            div class="body" { (section.body) }
        }
    }
}
