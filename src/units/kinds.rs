//! Dimensions by the name of a quantity: exponents of L, M, T, I, Θ, N, J.
//!
//! After SI Brochure, 9th ed., tables 4 to 6.

pub(super) type Exponents = [i8; 7];

pub(super) const NUMBER: Exponents = [0, 0, 0, 0, 0, 0, 0];
pub(super) const LENGTH: Exponents = [1, 0, 0, 0, 0, 0, 0];
pub(super) const MASS: Exponents = [0, 1, 0, 0, 0, 0, 0];
pub(super) const TIME: Exponents = [0, 0, 1, 0, 0, 0, 0];
pub(super) const CURRENT: Exponents = [0, 0, 0, 1, 0, 0, 0];
pub(super) const TEMPERATURE: Exponents = [0, 0, 0, 0, 1, 0, 0];
pub(super) const AMOUNT: Exponents = [0, 0, 0, 0, 0, 1, 0];
pub(super) const LUMINOUS_INTENSITY: Exponents = [0, 0, 0, 0, 0, 0, 1];
pub(super) const AREA: Exponents = [2, 0, 0, 0, 0, 0, 0];
pub(super) const VOLUME: Exponents = [3, 0, 0, 0, 0, 0, 0];
pub(super) const FREQUENCY: Exponents = [0, 0, -1, 0, 0, 0, 0];
pub(super) const SPEED: Exponents = [1, 0, -1, 0, 0, 0, 0];
pub(super) const ACCELERATION: Exponents = [1, 0, -2, 0, 0, 0, 0];
pub(super) const FORCE: Exponents = [1, 1, -2, 0, 0, 0, 0];
pub(super) const PRESSURE: Exponents = [-1, 1, -2, 0, 0, 0, 0];
pub(super) const ENERGY: Exponents = [2, 1, -2, 0, 0, 0, 0];
pub(super) const POWER: Exponents = [2, 1, -3, 0, 0, 0, 0];
pub(super) const DYNAMIC_VISCOSITY: Exponents = [-1, 1, -1, 0, 0, 0, 0];
pub(super) const KINEMATIC_VISCOSITY: Exponents = [2, 0, -1, 0, 0, 0, 0];
pub(super) const CHARGE: Exponents = [0, 0, 1, 1, 0, 0, 0];
pub(super) const VOLTAGE: Exponents = [2, 1, -3, -1, 0, 0, 0];
pub(super) const CAPACITANCE: Exponents = [-2, -1, 4, 2, 0, 0, 0];
pub(super) const RESISTANCE: Exponents = [2, 1, -3, -2, 0, 0, 0];
pub(super) const CONDUCTANCE: Exponents = [-2, -1, 3, 2, 0, 0, 0];
pub(super) const MAGNETIC_FLUX: Exponents = [2, 1, -2, -1, 0, 0, 0];
pub(super) const FLUX_DENSITY: Exponents = [0, 1, -2, -1, 0, 0, 0];
pub(super) const INDUCTANCE: Exponents = [2, 1, -2, -2, 0, 0, 0];
pub(super) const MAGNETIC_FIELD: Exponents = [-1, 0, 0, 1, 0, 0, 0];
pub(super) const ILLUMINANCE: Exponents = [-2, 0, 0, 0, 0, 0, 1];
pub(super) const ABSORBED_DOSE: Exponents = [2, 0, -2, 0, 0, 0, 0];
pub(super) const EXPOSURE: Exponents = [0, -1, 1, 1, 0, 0, 0];
pub(super) const CATALYTIC_ACTIVITY: Exponents = [0, 0, -1, 0, 0, 1, 0];

/// Names for messages; where quantities share a dimension, the one engineers meet most.
pub(super) const NAMES: &[(&str, Exponents)] = &[
    ("a plain number", NUMBER),
    ("length", LENGTH),
    ("mass", MASS),
    ("time", TIME),
    ("electric current", CURRENT),
    ("temperature", TEMPERATURE),
    ("amount of substance", AMOUNT),
    ("luminous intensity", LUMINOUS_INTENSITY),
    ("area", AREA),
    ("volume", VOLUME),
    ("a rate per time", FREQUENCY),
    ("speed", SPEED),
    ("acceleration", ACCELERATION),
    ("force", FORCE),
    ("pressure", PRESSURE),
    ("energy", ENERGY),
    ("power", POWER),
    ("dynamic viscosity", DYNAMIC_VISCOSITY),
    ("area per time", KINEMATIC_VISCOSITY),
    ("electric charge", CHARGE),
    ("voltage", VOLTAGE),
    ("capacitance", CAPACITANCE),
    ("resistance", RESISTANCE),
    ("conductance", CONDUCTANCE),
    ("magnetic flux", MAGNETIC_FLUX),
    ("magnetic flux density", FLUX_DENSITY),
    ("inductance", INDUCTANCE),
    ("magnetic field strength", MAGNETIC_FIELD),
    ("illuminance", ILLUMINANCE),
    ("energy per mass", ABSORBED_DOSE),
    ("exposure", EXPOSURE),
    ("catalytic activity", CATALYTIC_ACTIVITY),
    ("volume flow rate", [3, 0, -1, 0, 0, 0, 0]),
    ("mass flow rate", [0, 1, -1, 0, 0, 0, 0]),
    ("molar flow rate", [0, 0, -1, 0, 0, 1, 0]),
    ("density", [-3, 1, 0, 0, 0, 0, 0]),
    ("mass per area", [-2, 1, 0, 0, 0, 0, 0]),
    ("mass per length", [-1, 1, 0, 0, 0, 0, 0]),
    ("concentration", [-3, 0, 0, 0, 0, 1, 0]),
    ("molar mass", [0, 1, 0, 0, 0, -1, 0]),
    ("specific volume", [3, -1, 0, 0, 0, 0, 0]),
    ("momentum", [1, 1, -1, 0, 0, 0, 0]),
    ("moment of inertia", [2, 1, 0, 0, 0, 0, 0]),
    ("second moment of area", [4, 0, 0, 0, 0, 0, 0]),
    ("stiffness", [0, 1, -2, 0, 0, 0, 0]),
    ("pressure gradient", [-2, 1, -2, 0, 0, 0, 0]),
    ("temperature rate", [0, 0, -1, 0, 1, 0, 0]),
    ("temperature gradient", [-1, 0, 0, 0, 1, 0, 0]),
    ("specific heat capacity", [2, 0, -2, 0, -1, 0, 0]),
    ("heat capacity", [2, 1, -2, 0, -1, 0, 0]),
    ("molar heat capacity", [2, 1, -2, 0, -1, -1, 0]),
    ("thermal conductivity", [1, 1, -3, 0, -1, 0, 0]),
    ("heat transfer coefficient", [0, 1, -3, 0, -1, 0, 0]),
    ("thermal conductance", [2, 1, -3, 0, -1, 0, 0]),
    ("heat flux", [0, 1, -3, 0, 0, 0, 0]),
    ("power per volume", [-1, 1, -3, 0, 0, 0, 0]),
    ("expansion per temperature", [0, 0, 0, 0, -1, 0, 0]),
    ("electric field strength", [1, 1, -3, -1, 0, 0, 0]),
    ("number per length", [-1, 0, 0, 0, 0, 0, 0]),
    ("number per area", [-2, 0, 0, 0, 0, 0, 0]),
    ("number per volume", [-3, 0, 0, 0, 0, 0, 0]),
];
