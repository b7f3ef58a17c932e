//! The model of the window: the document and its history, edits, pins and settings. Knows nothing of drawing.

pub mod document;
pub mod edit;
pub mod examples;
pub mod law_kinds;
pub mod law_parameters;
pub mod law_tree;
pub mod pins;
pub mod prepared;
pub mod settings;
