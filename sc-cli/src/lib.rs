//! The parts of the `prevertex` program: files, units, words, figures and exit codes around `sc-core`.

pub mod input;
