//! TODO room.
