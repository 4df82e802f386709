pub mod charges;
pub mod field;
pub mod finite_size;
pub mod graded;
pub mod poly;
pub mod potential;
