//! From the plenum into the channel: isentropic to a uniform profile.
//!
//! `u^2/2 = int_p^p1 dp/rho` along `dT/dp = beta T/(rho cp)` (Bernoulli 1738 for a compressible fluid): no friction, no
//! separation, so a rounded entrance.

use super::refused::Refused;
use super::substance::{Reference, State, Substance};

/// Steps of the integration along the isentrope, and rounds of the search for its end.
const STEPS: usize = 4;
const ROUNDS: usize = 60;
/// Relative change of the velocity head at which the search ends.
const SETTLED: f64 = 1e-11;
/// Largest fall of pressure in the inlet, as a share of the plenum's: far beyond what Mach 0.3 needs.
const DEEPEST: f64 = 0.5;

/// A state with its pressure and temperature.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Place {
    /// Absolute pressure, Pa.
    pub pressure: f64,
    /// Temperature, K.
    pub temperature: f64,
    /// What the fluid is there.
    pub state: State,
}

/// What the fluid's temperature does in the inlet.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Entrance {
    /// It follows the isentrope.
    Isentropic,
    /// It stays.
    Isothermal,
}

/// What the inlet makes of the plenum.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Entered {
    /// State behind the inlet.
    pub place: Place,
    /// Velocity, m/s.
    pub velocity: f64,
    /// Pressure below that of the plenum, Pa: kept apart, since a difference of the two pressures has few digits.
    pub fall: f64,
}

/// The state behind the inlet for a mass flow per area `flux`, kg/(m2 s).
///
/// # Errors
/// No pressure is low enough for the flux, or the state leaves the fluid's table.
pub(crate) fn enter(
    substance: &Substance<'_>,
    reference: &Reference,
    plenum: &Place,
    flux: f64,
    heat: Entrance,
) -> Result<Entered, Refused> {
    let (mut place, mut head, mut fall) = (*plenum, 0.0, 0.0);
    let mut change = f64::INFINITY;
    for _ in 0..ROUNDS {
        let velocity = flux / place.state.density;
        let wanted = 0.5 * velocity * velocity;
        change = (wanted - head) / wanted;
        if change.abs() <= SETTLED {
            return Ok(Entered { place, velocity, fall });
        }
        fall += (wanted - head) * place.state.density;
        if fall.is_nan() || fall >= DEEPEST * plenum.pressure {
            return Err(Refused::Vacuum { pressure: plenum.pressure - fall, position: 0.0 });
        }
        (place, head) = expand(substance, reference, plenum, fall, heat)?;
    }
    Err(Refused::NotSettled { what: "the inlet", change })
}

/// Expands from the plenum by a fall of pressure; returns the state and the velocity head int dp/rho.
fn expand(
    substance: &Substance<'_>,
    reference: &Reference,
    plenum: &Place,
    fall: f64,
    heat: Entrance,
) -> Result<(Place, f64), Refused> {
    let step = -fall / STEPS as f64;
    let (mut p, mut t, mut head) = (plenum.pressure, plenum.temperature, 0.0);
    for _ in 0..STEPS {
        let (volume1, rise1) = slopes(substance, reference, heat, t, p);
        let (volume2, rise2) = slopes(substance, reference, heat, t + 0.5 * step * rise1, p + 0.5 * step);
        let (volume3, rise3) = slopes(substance, reference, heat, t + 0.5 * step * rise2, p + 0.5 * step);
        let (volume4, rise4) = slopes(substance, reference, heat, t + step * rise3, p + step);
        t += step / 6.0 * (rise1 + 2.0 * (rise2 + rise3) + rise4);
        head -= step / 6.0 * (volume1 + 2.0 * (volume2 + volume3) + volume4);
        p += step;
    }
    let pressure = plenum.pressure - fall;
    substance.check(t, pressure)?;
    Ok((Place { pressure, temperature: t, state: substance.state(t, pressure, reference) }, head))
}

/// (1/rho, dT/dp along the entrance) at a state, by differences of the enthalpy and density themselves.
fn slopes(
    substance: &Substance<'_>,
    reference: &Reference,
    heat: Entrance,
    temperature: f64,
    pressure: f64,
) -> (f64, f64) {
    let (dt, dp) = (0.05, 1e-4 * pressure);
    let enthalpy = |t: f64, p: f64| substance.state(t, p, reference).enthalpy;
    let volume = 1.0 / substance.density(temperature, pressure);
    if heat == Entrance::Isothermal {
        return (volume, 0.0);
    }
    let capacity = (enthalpy(temperature + dt, pressure) - enthalpy(temperature - dt, pressure)) / (2.0 * dt);
    let lift = (enthalpy(temperature, pressure + dp) - enthalpy(temperature, pressure - dp)) / (2.0 * dp);
    // dh = cp dT + (dh/dp) dp = dp/rho along the isentrope.
    (volume, (volume - lift) / capacity)
}
