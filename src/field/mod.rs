//! Finite fields and matrices over them.
