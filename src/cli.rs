//! The command line: arguments to actions.
