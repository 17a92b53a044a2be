//! Typed rows in, bytes out.
