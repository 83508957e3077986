//! The registry of methods.
//!
//! When adding a method: one file here with coefficients, citation and names of intermediates, one `mod` line
//! and one line in [`METHODS`]. The tests of `march` then check it: row sums, order conditions, stability,
//! observed order, order through events.

mod abm2;
mod abm4;
mod backward_euler;
mod bdf2;
mod bogacki_shampine32;
mod dormand_prince54;
mod euler;
mod heun;
mod heun_iterated;
mod kutta3;
mod midpoint;
mod radau5;
mod ralston2;
mod rk38;
mod rk4;
mod ssprk3;
mod tr_bdf2;
mod trapezoidal;

use super::{Embedded, Method, Tableau};

/// Every method, in the order in which documentation lists them.
pub static METHODS: &[&Method] = &[
    &euler::METHOD,
    &heun::METHOD,
    &heun_iterated::METHOD,
    &midpoint::METHOD,
    &ralston2::METHOD,
    &kutta3::METHOD,
    &ssprk3::METHOD,
    &rk4::METHOD,
    &rk38::METHOD,
    &bogacki_shampine32::METHOD,
    &dormand_prince54::METHOD,
    &abm2::METHOD,
    &abm4::METHOD,
    &backward_euler::METHOD,
    &trapezoidal::METHOD,
    &tr_bdf2::METHOD,
    &bdf2::METHOD,
    &radau5::METHOD,
];

/// The pairs whose estimate chooses a grid for methods that have none.
pub(super) static EXPLICIT_PAIR: (&Method, &Tableau, Embedded) = (
    &bogacki_shampine32::METHOD,
    &bogacki_shampine32::TABLEAU,
    bogacki_shampine32::EMBEDDED,
);
pub(super) static IMPLICIT_PAIR: (&Method, &Tableau, Embedded) =
    (&tr_bdf2::METHOD, &tr_bdf2::TABLEAU, tr_bdf2::EMBEDDED);

/// The method that the problem file calls `name`.
pub fn method(name: &str) -> Option<&'static Method> {
    METHODS.iter().copied().find(|method| method.name == name)
}
