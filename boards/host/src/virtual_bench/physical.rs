//! States that cannot be, and the physical reason.

use evenbore::fluid::StoredFluid;

/// Water freezes, K.
const FREEZING: f64 = 273.15;

/// Gases that a bench can liquefy: critical temperature K, critical pressure Pa, acentric factor (from memory).
const CONDENSABLE: [(&str, f64, f64, f64); 4] = [
    ("propane", 369.83, 4.25e6, 0.152),
    ("sulfur-hexafluoride", 318.72, 3.755e6, 0.210),
    ("carbon-dioxide", 304.13, 7.377e6, 0.225),
    ("xenon", 289.73, 5.842e6, 0.004),
];

/// Vapour pressure of water, Pa: the Magnus form `611.2 exp(17.62 t/(243.12 + t))` with the constants of the WMO, within
/// 0.3 % of saturation over liquid water to 60 C.
pub fn water_vapour_pressure(temperature: f64) -> f64 {
    let celsius = temperature - FREEZING;
    611.2 * (17.62 * celsius / (243.12 + celsius)).exp()
}

/// Vapour pressure of a condensable gas below its critical temperature, Pa (Lee & Kesler 1975, about 1 %).
pub fn vapour_pressure(name: &str, temperature: f64) -> Option<f64> {
    let (_, critical, pressure, acentric) = CONDENSABLE.iter().find(|(known, ..)| *known == name)?;
    let t = temperature / critical;
    let (log, sixth) = (t.ln(), t.powi(6));
    let simple = 5.92714 - 6.09648 / t - 1.28862 * log + 0.169347 * sixth;
    let shaped = 15.2518 - 15.6875 / t - 13.4721 * log + 0.43577 * sixth;
    (t < 1.0).then(|| pressure * (simple + acentric * shaped).exp())
}

/// Why a fluid cannot flow through an element at a state (K, Pa) with an outlet pressure (Pa).
pub fn impossible(fluid: &StoredFluid, temperature: f64, pressure: f64, outlet: f64) -> Option<String> {
    let (celsius, kpa, name) = (temperature - FREEZING, pressure / 1e3, fluid.name());
    if temperature <= 0.0 {
        return Some(format!("{celsius:.2} C is below absolute zero"));
    }
    if pressure <= 0.0 {
        return Some(format!("a line pressure of {kpa:.3} kPa is negative: no absolute pressure is below 0"));
    }
    if outlet <= 0.0 {
        let drop = (pressure - outlet) / 1e3;
        return Some(format!(
            "a pressure drop of {drop:.3} kPa from {kpa:.3} kPa leaves a vacuum at the outlet: no flow has it"
        ));
    }
    if name == "water" && temperature < FREEZING {
        return Some(format!("water is ice at {celsius:.2} C"));
    }
    if name == "water" && outlet < water_vapour_pressure(temperature) {
        return Some(format!(
            "water boils at {celsius:.2} C and {:.3} kPa: two phases leave the element",
            outlet / 1e3
        ));
    }
    match vapour_pressure(name, temperature) {
        Some(limit) if pressure >= limit => Some(format!(
            "{name} condenses at {celsius:.2} C and {kpa:.1} kPa, its vapour pressure being about {:.0} kPa: two phases",
            limit / 1e3
        )),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Printed vapour pressures at 20 C: water 2.339 kPa; propane 836 kPa, sulfur hexafluoride 2.1 MPa, carbon dioxide
    /// 5.73 MPa (from memory).
    #[test]
    fn vapour_pressures() {
        assert!((water_vapour_pressure(293.15) / 2339.0 - 1.0).abs() < 3e-3);
        for (name, expected) in [("propane", 836e3), ("sulfur-hexafluoride", 2.1e6), ("carbon-dioxide", 5.73e6)] {
            let found = vapour_pressure(name, 293.15).unwrap_or(f64::NAN);
            assert!((found / expected - 1.0).abs() < 0.02, "{name}: {found}");
        }
    }
}
