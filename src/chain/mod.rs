//! The one-loop spin chain on cyclic states: necklaces, commuting charges, and the spectrum split
//! into Galois orbits (formulas §1).

pub mod charges;
pub mod krylov;
pub mod necklace;
pub mod orbit;
pub mod spectrum;
pub mod transfer;

pub use orbit::Orbit;
pub use spectrum::spectrum;
