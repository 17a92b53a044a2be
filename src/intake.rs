//! Bytes in, typed rows or located errors out.
