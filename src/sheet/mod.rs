//! Projection: a [`Frame`](crate::frames::Frame) becomes a surface, heights over reference sites.

mod modes;

pub use modes::{LONG_WAVES, ModeSet};
