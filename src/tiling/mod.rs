//! Patches of regular tilings {p,q}.
