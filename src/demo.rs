//! An invented district, part-way through a screening day.
