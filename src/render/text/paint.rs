//! Colour, where the page allows it.

/// Whether colour codes are written.
#[derive(Clone, Copy, Debug)]
pub(super) struct Paint(pub(super) bool);

impl Paint {
    pub(super) fn strong(self, text: &str) -> String {
        self.wrap("1", text)
    }

    pub(super) fn quiet(self, text: &str) -> String {
        self.wrap("2", text)
    }

    pub(super) fn good(self, text: &str) -> String {
        self.wrap("32", text)
    }

    pub(super) fn bad(self, text: &str) -> String {
        self.wrap("1;31", text)
    }

    pub(super) fn unsure(self, text: &str) -> String {
        self.wrap("33", text)
    }

    fn wrap(self, code: &str, text: &str) -> String {
        if self.0 && !text.is_empty() {
            format!("\u{1b}[{code}m{text}\u{1b}[0m")
        } else {
            text.to_owned()
        }
    }
}
