//! Where in the brief something stands.

use std::ops::Range;

/// A line and column of the brief, both from 1; columns count characters.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Place {
    /// Line, from 1.
    pub line: u32,
    /// Column, from 1.
    pub column: u32,
}

impl Place {
    /// The first character of the brief.
    pub const START: Self = Self { line: 1, column: 1 };
}

/// A value of the brief together with the place it was written at.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Located<T> {
    /// The value.
    pub value: T,
    /// Where it stands.
    pub place: Place,
}

impl<T> Located<T> {
    /// A value and its place.
    pub const fn new(value: T, place: Place) -> Self {
        Self { value, place }
    }

    /// Another value at the same place.
    pub(super) fn map<U>(self, change: impl FnOnce(T) -> U) -> Located<U> {
        Located::new(change(self.value), self.place)
    }
}

/// Turns byte offsets of a text into places.
#[derive(Debug)]
pub(super) struct Lines<'a> {
    text: &'a str,
    starts: Vec<usize>,
}

impl<'a> Lines<'a> {
    pub(super) fn new(text: &'a str) -> Self {
        let starts = std::iter::once(0)
            .chain(text.match_indices('\n').map(|(at, _)| at + 1))
            .collect();
        Self { text, starts }
    }

    pub(super) fn place(&self, offset: usize) -> Place {
        let offset = offset.min(self.text.len());
        let line = self.starts.partition_point(|&start| start <= offset);
        let start = self.starts[line - 1];
        let before = self.text.get(start..offset).unwrap_or_default();
        Place {
            line: u32::try_from(line).unwrap_or(u32::MAX),
            column: u32::try_from(before.chars().count() + 1).unwrap_or(u32::MAX),
        }
    }

    pub(super) fn start_of(&self, span: Option<Range<usize>>) -> Option<Place> {
        span.map(|span| self.place(span.start))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn places_count_lines_and_characters_from_one() {
        let lines = Lines::new("a\r\nµ = 1\n");
        let place = |offset| {
            let place = lines.place(offset);
            (place.line, place.column)
        };
        assert_eq!(place(0), (1, 1));
        assert_eq!(place(3), (2, 1));
        assert_eq!(place(5), (2, 2));
        assert_eq!(place(10), (3, 1));
        assert_eq!(place(99), (3, 1));
        assert_eq!(Lines::new("").place(0), Place::START);
    }
}
