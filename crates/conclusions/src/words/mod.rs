//! Sentences: the plan, the finding, laws and the one-paragraph summary, in words a manager understands.

pub mod finding;
mod law;
pub mod nouns;
pub mod numbers;
mod plan;
mod summary;

pub use law::describe_law;
pub use plan::plan_sentence;
pub use summary::{remedy_in_words, summary_paragraph};
