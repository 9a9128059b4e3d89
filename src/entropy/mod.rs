//! Boundary regions to entropies, with evidence.
