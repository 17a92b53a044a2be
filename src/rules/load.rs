//! TOML text to typed rule sets.
