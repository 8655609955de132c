//! Words that every room uses: [`atom`] (elements, species, terms), [`light`] (spectral
//! quantities, units, air) and [`spectrum`] (what is known about one species: levels and lines).
//! This crate depends on no other room.

pub mod atom;
pub mod light;
pub mod spectrum;
