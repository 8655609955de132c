//! Words that every room uses: [`atom`] (elements, species, terms), [`light`] (spectral
//! quantities, units, air), [`spectrum`] (what is known about one species: levels and lines) and
//! [`report`] (what each source says of it).
//! This crate depends on no other room.

pub mod atom;
pub mod light;
pub mod report;
pub mod spectrum;
