//! The parts of the `prevertex` program: files, units, words, figures and exit statuses around `sc-core`.
//!
//! ```text
//! section file ──input──▶ SectionFile ──section──▶ Prepared ──answer──▶ Document ──▶ JSON
//!                                              │                           └──report──▶ text
//!                                              └──figure──▶ Drawing ──▶ SVG, PNG
//! ```
//! Nothing below `commands` prints, exits or knows of arguments; nothing in `sc-core` knows of units, names or files.

pub mod answer;
pub mod arguments;
pub mod commands;
pub mod destination;
pub mod figure;
pub mod input;
pub mod outcome;
pub mod report;
pub mod section;
