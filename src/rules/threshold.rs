//! Thresholds as the guidance prints them, typed.
