//! One function is one user intention and one transaction.
