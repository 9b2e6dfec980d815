//! Numbers in JSON.

/// Writes a number as CSV does, so that both forms show the same digits.
pub(super) fn rounded<S: serde::Serializer>(
    value: &Option<f64>,
    serializer: S,
) -> Result<S::Ok, S::Error> {
    use crate::quantity::number::{LOOK_UP_DIGITS, text};
    match value {
        Some(value) => {
            let shown: f64 = text(*value, LOOK_UP_DIGITS)
                .parse()
                .expect("what was written is a number");
            serializer.serialize_some(&shown)
        }
        None => serializer.serialize_none(),
    }
}
