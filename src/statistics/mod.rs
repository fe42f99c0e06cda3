//! Series algorithms: numbers in, numbers out.
