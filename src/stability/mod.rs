//! What a structure alone tells a chemist at the bench: that it does not last,
//! that it is dangerous, that it reacts with its neighbor in the bottle.
//!
//! Rules and reactions are rows of `groups/stability/`, patterns with words.
//! Decides nothing: what a broken rule means is for the caller. Entry points:
//! [`Rules::built_in`], [`Reactions::built_in`].

mod error;
mod reactions;
mod rules;

pub use error::StabilityError;
pub use reactions::{Classes, Reaction, Reactions};
pub use rules::{Condition, Rule, Rules, Verdict};

/// Scratch memory for looking at molecules, one per thread.
#[derive(Clone, Debug, Default)]
pub struct Scratch(crate::groups::pattern::PatternFinder);

impl Scratch {
    /// Empty memory.
    pub fn new() -> Self {
        Self::default()
    }
}
