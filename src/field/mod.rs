//! Finite fields and matrices over them.
//!
//! [`Field`] is GF(q) for a prime power q up to 2^16, with table arithmetic. [`Matrix`] is a
//! dense matrix over it: rank, reduced echelon form, null space, solutions. Matrices over
//! GF(2) are packed one bit an entry, over GF(3) two bits an entry, both reduced with
//! tables of row combinations; the rest holds sixteen bits an entry.
//!
//! An element is a number v = Σ c_i p^i below q, standing for Σ c_i x^i modulo the field's
//! polynomial ([`Field::modulus`]); 0 and 1 are zero and one, and the sum is taken digit by
//! digit.

mod bits;
mod matrix;
mod polynomial;
mod the_field;
mod trits;
mod words;

pub use matrix::Matrix;
pub use polynomial::{factorise, prime_power};
pub use the_field::{Field, FieldError};
