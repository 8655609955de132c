//! Checks of the vocabulary against the world outside, and its exact messages.

mod quantities;
mod species;
