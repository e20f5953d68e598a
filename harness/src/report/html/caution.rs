//! Cautions. That of a role stands above everything, that for all readers at the end; neither can be switched off.

use maud::{Markup, html};

/// What every report ends with.
pub(super) const GENERAL: &str = "Debouncing makes no input safe. Where a contact guards people or property, or counts for \
trade, the function belongs to certified parts, assessed by qualified people under the local code. Nothing here has been \
assessed for such use.";

/// The caution for the role that the requirement names.
pub(super) fn for_role(caution: &str) -> Markup {
    html! {
        p class="caution" role="note" { strong { "Caution: " } (caution) "." }
    }
}
