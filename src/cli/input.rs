//! Texts from files, standard input and the command line.

use std::fs;
use std::io::{self, ErrorKind, Read};
use std::path::Path;

use crate::diagnostic::Diagnostic;

/// Where a text comes from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum Origin {
    /// A file by its path, `-` for standard input.
    File(String),
    /// Given with `-e`.
    CommandLine(String),
}

impl Origin {
    /// The name it is reported under.
    pub(super) fn name(&self) -> &str {
        match self {
            Self::File(path) if path == "-" => "standard input",
            Self::File(path) => path,
            Self::CommandLine(_) => "command line",
        }
    }

    /// The whole text.
    ///
    /// # Errors
    /// A message about the file as a whole: missing, not readable, a directory, not UTF-8.
    pub(super) fn read(&self, input: &mut dyn Read) -> Result<String, Diagnostic> {
        let bytes = match self {
            Self::CommandLine(text) => return Ok(text.clone()),
            Self::File(path) if path == "-" => {
                let mut bytes = Vec::new();
                input.read_to_end(&mut bytes).map(|_| bytes)
            }
            Self::File(path) => fs::read(path),
        };
        text_of(self.name(), bytes)
    }
}

/// The text of a used file, its path relative to the file that uses it, with the name to report.
///
/// # Errors
/// A sentence, as for [`Origin::read`].
pub(super) fn used(from: &str, path: &str) -> Result<(String, String), String> {
    let folder = Path::new(from).parent().unwrap_or(Path::new(""));
    let file = folder.join(path);
    let name = file.to_string_lossy().into_owned();
    let text = text_of(&name, fs::read(&file)).map_err(|trouble| trouble.message)?;
    Ok((name, text))
}

fn text_of(name: &str, bytes: io::Result<Vec<u8>>) -> Result<String, Diagnostic> {
    let bytes = bytes.map_err(|error| unreadable(name, &error))?;
    String::from_utf8(bytes).map_err(|error| not_text(name, error.as_bytes()))
}

fn unreadable(name: &str, error: &io::Error) -> Diagnostic {
    match error.kind() {
        ErrorKind::NotFound => Diagnostic::whole(format!("there is no file {name}")),
        ErrorKind::IsADirectory => {
            Diagnostic::whole(format!("{name} is a directory")).help("name a file in it")
        }
        ErrorKind::PermissionDenied => {
            Diagnostic::whole(format!("{name} may not be read: permission denied"))
        }
        _ => Diagnostic::whole(format!("{name} cannot be read: {error}")),
    }
}

fn not_text(name: &str, bytes: &[u8]) -> Diagnostic {
    let start = match std::str::from_utf8(bytes) {
        Ok(_) => bytes.len(),
        Err(error) => error.valid_up_to(),
    };
    let line = bytes[..start].iter().filter(|&&byte| byte == b'\n').count() + 1;
    Diagnostic::whole(format!(
        "{name} is not UTF-8 text: line {line} holds other bytes"
    ))
    .help("save the file as UTF-8")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn fails_on_a_missing_file_and_on_a_directory() {
        let mut input: &[u8] = &[];
        let missing = Origin::File("no such file.cutloop".to_owned());
        let message = missing.read(&mut input).unwrap_err().message;
        assert_eq!(message, "there is no file no such file.cutloop");
        let directory = Origin::File("src".to_owned());
        let message = directory.read(&mut input).unwrap_err().message;
        assert_eq!(message, "src is a directory");
    }

    #[test]
    fn says_in_which_line_a_text_is_not_utf8() {
        let mut input: &[u8] = b"in -R1- out\n# caf\xe9\n";
        let message = Origin::File("-".to_owned()).read(&mut input).unwrap_err();
        assert_eq!(
            message.message,
            "standard input is not UTF-8 text: line 2 holds other bytes"
        );
    }
}
