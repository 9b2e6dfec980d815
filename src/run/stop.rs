//! Asking a run to end.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// A flag that one side raises and the other looks at between units of work.
///
/// Clones share the flag. Once raised it stays raised.
#[derive(Clone, Debug, Default)]
pub struct StopFlag(Arc<AtomicBool>);

impl StopFlag {
    /// A flag that is not raised.
    pub fn new() -> Self {
        Self::default()
    }

    /// Asks the run to end. True if nobody had asked before.
    pub fn raise(&self) -> bool {
        !self.0.swap(true, Ordering::Relaxed)
    }

    /// Whether the run was asked to end.
    pub fn is_raised(&self) -> bool {
        self.0.load(Ordering::Relaxed)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn clones_share_the_flag_and_only_the_first_raise_counts() {
        let flag = StopFlag::new();
        let other = flag.clone();
        assert!(!other.is_raised());
        assert!(flag.raise());
        assert!(!other.raise());
        assert!(other.is_raised());
    }
}
