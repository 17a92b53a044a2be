//! The one declaration of commands and keys.
