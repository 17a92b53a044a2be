//! The shape of the code: direction of dependencies, file lengths, doc words.
