//! Published methods on plain numbers: distributions, intervals, fits, risks. Pure; knows no boards and no benches.

pub mod censored;
pub mod coverage;
pub mod distribution;
pub mod influence;
pub mod line;
pub mod monte_carlo;
mod quadrature;
pub mod quotient;
pub mod risk;
mod root;
pub mod sample;
pub mod tolerance;
