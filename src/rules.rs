//! Published guidance as data: load, evaluate, explain.
