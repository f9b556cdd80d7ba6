//! Answers as LaTeX.
