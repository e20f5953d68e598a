//! A figure: a picture, what it says in words, and the numbers behind it.

use maud::{Markup, html};

/// A picture with its text alternatives.
#[derive(Clone, Debug)]
pub struct Figure {
    /// Unique in the page; the names of the parts begin with it.
    pub id: String,
    /// What the picture shows, in a few words.
    pub title: String,
    /// What is to be seen in it, for a reader who does not see it.
    pub description: String,
    /// The view box.
    pub view_box: String,
    /// Everything inside the `svg` element.
    pub drawing: Markup,
    /// What stands below it; may be empty.
    pub caption: Markup,
    /// The numbers, as a table to open.
    pub data: Option<Markup>,
}

impl Figure {
    /// The figure as wide as its column.
    #[must_use]
    pub fn markup(&self) -> Markup {
        self.framed("figure")
    }

    /// The figure as wide as the page; on a narrow screen it is moved sideways.
    #[must_use]
    pub fn wide(&self) -> Markup {
        self.framed("figure wide")
    }

    fn framed(&self, class: &str) -> Markup {
        let (title, description) = (format!("{}-title", self.id), format!("{}-description", self.id));
        html! {
            figure id=(self.id) class=(class) {
                h3 id=(title) { (self.title) }
                div class="picture" {
                    svg xmlns="http://www.w3.org/2000/svg" class="plot" viewBox=(self.view_box) role="img"
                        aria-labelledby={ (title) " " (description) } {
                        title { (self.title) }
                        desc id=(description) { (self.description) }
                        (self.drawing)
                    }
                }
                @if self.data.is_some() || !self.caption.0.is_empty() {
                    figcaption {
                        (self.caption)
                        @if let Some(data) = &self.data {
                            details { summary { "The numbers" } (data) }
                        }
                    }
                }
            }
        }
    }
}
