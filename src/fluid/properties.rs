//! A stored table evaluated at one temperature: what remains is cheap arithmetic in pressure.

use super::stored::{COARSE_NODES, Curve, FINE_NODES, LIQUID_SCALE, Phase, StoredFluid};
use crate::math::Real;
use crate::quantity::{AbsolutePressure, Density, Temperature, Viscosity};
use crate::status::Refusal;

/// Molar gas constant, J/(mol K), exact since the SI of 2019.
pub(crate) const MOLAR_GAS_CONSTANT: f64 = 8.314_462_618_153_24;

/// Properties at one temperature, of a dry or pure fluid.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub(crate) struct PropertiesAt<F> {
    /// Viscosity towards zero pressure, Pa s.
    pub mu0: F,
    /// Pressure coefficients of viscosity, 1/Pa and 1/Pa2.
    pub k: [F; 2],
    /// Pressure coefficients of Z (gas) or of density (liquid).
    pub z: [F; 3],
    /// Gas: M/(R T), kg/(m3 Pa); liquid: density towards zero pressure, kg/m3.
    pub base: F,
    /// Gas: conduction group G; liquid: zero.
    pub conduction: F,
    /// Slope of mu0 per segment of its curve, Pa s.
    pub viscosity_slope: F,
    /// Liquid: slope of `base` per segment of its curve; gas: zero.
    pub density_slope: F,
    /// K.
    pub temperature: F,
    /// Width of the table, K.
    pub span: F,
    /// Whether density follows pressure.
    pub gas: bool,
}

impl<F: Real> PropertiesAt<F> {
    /// Evaluates `fluid` at `temperature` (K); outside the table the nearest end is taken.
    pub fn new(fluid: &StoredFluid, temperature: F) -> Self {
        let low = F::stored(fluid.temperature_range[0]);
        let span = F::stored(fluid.temperature_range[1]) - low;
        let t = (temperature - low) / span; // 0..1 over the table
        let (fine, coarse) = (Curve::<FINE_NODES>::place(t), Curve::<COARSE_NODES>::place(t));
        let (mu, mu_slope) = (fluid.viscosity.value(&fine), fluid.viscosity.slope(&fine));
        let [k1, k2] = &fluid.viscosity_pressure;
        let [b, c, d] = &fluid.density_pressure;
        let extra = fluid.extra.value(&coarse);
        let gas = matches!(fluid.phase, Phase::Gas);
        let zero = F::of(0.0);
        let (mu0, mu_slope, base, conduction, density_slope) = if gas {
            (mu, mu_slope, F::stored(fluid.molar_mass) / (F::of(MOLAR_GAS_CONSTANT) * temperature), extra, zero)
        } else {
            let mu = F::of(LIQUID_SCALE) * mu.exponential();
            (mu, mu_slope * mu, extra, zero, fluid.extra.slope(&coarse))
        };
        Self {
            mu0,
            k: [k1.value(&coarse), k2.value(&coarse)],
            z: [b.value(&coarse), c.value(&coarse), d.value(&coarse)],
            base,
            conduction,
            viscosity_slope: mu_slope,
            density_slope,
            temperature,
            span,
            gas,
        }
    }

    /// n = dln mu/dln T.
    pub fn exponent(&self) -> F {
        let segments = F::of(Curve::<FINE_NODES>::SEGMENTS as f64);
        self.viscosity_slope * segments * self.temperature / (self.mu0 * self.span)
    }

    /// dln rho/dT at constant pressure, 1/K.
    pub fn expansion(&self) -> F {
        let segments = F::of(Curve::<COARSE_NODES>::SEGMENTS as f64);
        if self.gas { -F::of(1.0) / self.temperature } else { self.density_slope * segments / (self.base * self.span) }
    }

    /// Dynamic viscosity at absolute pressure `p`, Pa s.
    pub fn viscosity(&self, p: F) -> F {
        let [k1, k2] = self.k;
        self.mu0 + self.mu0 * (p * (k1 + p * k2))
    }

    /// Density at absolute pressure `p`, kg/m3.
    pub fn density(&self, p: F) -> F {
        let [over, under] = self.density_ratio(p);
        if self.gas { over / under } else { over }
    }

    /// Density as numerator (kg/m3) and denominator, which is 1 for a liquid.
    pub fn density_ratio(&self, p: F) -> [F; 2] {
        let [b, c, d] = self.z;
        let series = F::of(1.0) + p * (b + p * (c + p * d));
        if self.gas { [p * self.base, series] } else { [self.base * series, F::of(1.0)] }
    }
}

/// Which of temperature (K) and pressure (Pa) a table cannot serve; none when it can serve both.
pub(crate) fn outside<F: Real>(fluid: &StoredFluid, temperature: F, pressure: F) -> Refusal {
    let [t_low, t_high] = fluid.temperature_range.map(F::stored);
    let mut refusal = pressure_outside(fluid, pressure);
    if !(temperature >= t_low && temperature <= t_high) {
        refusal |= Refusal::TEMPERATURE_OUTSIDE_TABLE;
    }
    refusal
}

/// Whether a table cannot serve a pressure (Pa).
pub(crate) fn pressure_outside<F: Real>(fluid: &StoredFluid, pressure: F) -> Refusal {
    let [low, high] = fluid.pressure_range.map(F::stored);
    if pressure >= low && pressure <= high { Refusal::empty() } else { Refusal::PRESSURE_OUTSIDE_TABLE }
}

impl StoredFluid {
    fn at(&self, temperature: Temperature, pressure: AbsolutePressure) -> Result<PropertiesAt<f32>, Refusal> {
        let (t, p) = (temperature.as_kelvin(), pressure.as_pascals());
        if !(t.is_finite() && p.is_finite()) {
            return Err(Refusal::NOT_FINITE);
        }
        let refusal = outside(self, t, p);
        if refusal.is_empty() { Ok(PropertiesAt::new(self, t)) } else { Err(refusal) }
    }

    /// Dynamic viscosity at a temperature and an absolute pressure.
    ///
    /// Accuracy: the table's residual (in the catalogue, below 20 ppm) and 1 ppm of single precision; what the
    /// viscosity itself is worth is [`StoredFluid::u_viscosity`].
    ///
    /// # Errors
    /// Refuses what is not finite or lies outside the table.
    ///
    /// ```
    /// use evenbore::fluid::catalogue::NITROGEN;
    /// use evenbore::quantity::{AbsolutePressure, Temperature};
    /// let (t, p) = (Temperature::from_celsius(25.0), AbsolutePressure::from_kilopascals(101.325));
    /// let mu = NITROGEN.fluid().viscosity(t, p)?;
    /// assert!((mu.as_micropascal_seconds() - 17.76).abs() < 0.01);
    /// # Ok::<(), evenbore::status::Refusal>(())
    /// ```
    pub fn viscosity(&self, temperature: Temperature, pressure: AbsolutePressure) -> Result<Viscosity, Refusal> {
        let at = self.at(temperature, pressure)?;
        Ok(Viscosity::from_pascal_seconds(at.viscosity(pressure.as_pascals())))
    }

    /// Density at a temperature and an absolute pressure.
    ///
    /// # Errors
    /// Refuses what is not finite or lies outside the table.
    ///
    /// ```
    /// use evenbore::fluid::catalogue::WATER;
    /// use evenbore::quantity::{AbsolutePressure, Temperature};
    /// let (t, p) = (Temperature::from_celsius(20.0), AbsolutePressure::from_kilopascals(101.325));
    /// let rho = WATER.fluid().density(t, p)?;
    /// assert!((rho.as_kilograms_per_cubic_metre() - 998.2).abs() < 0.1);
    /// # Ok::<(), evenbore::status::Refusal>(())
    /// ```
    pub fn density(&self, temperature: Temperature, pressure: AbsolutePressure) -> Result<Density, Refusal> {
        let at = self.at(temperature, pressure)?;
        Ok(Density::from_kilograms_per_cubic_metre(at.density(pressure.as_pascals())))
    }
}
