//! The encrypted, append-only store; the only place with SQL.
