//! Optical filters and detectors.
