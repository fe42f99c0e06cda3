//! Named numerical algorithms, each with an oracle test.
