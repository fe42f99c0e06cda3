//! Tables, figures, the page and the terminal summary; and whole-or-nothing writing of files.
