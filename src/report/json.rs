//! Rows as JSON.

use std::io::{self, Write};

use serde::Serialize;

/// Writes rows as one JSON array, a row on each line.
///
/// # Errors
///
/// What the sink says; a closed pipe comes through as it is.
pub fn write_json_rows<R: Serialize>(
    sink: &mut impl Write,
    rows: impl IntoIterator<Item = R>,
) -> io::Result<()> {
    let mut buffer = Vec::with_capacity(1 << 10);
    buffer.push(b'[');
    let mut is_first = true;
    for row in rows {
        buffer.extend_from_slice(if is_first { b"\n  " } else { b",\n  " });
        is_first = false;
        serde_json::to_writer(&mut buffer, &row).map_err(io::Error::from)?;
        sink.write_all(&buffer)?;
        buffer.clear();
    }
    buffer.extend_from_slice(if is_first { b"]\n" } else { b"\n]\n" });
    sink.write_all(&buffer)
}

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
