//! Heat capacities, and the conductivity of liquids: what the energy equation needs and no stored table holds.
//!
//! Gases: `cp0/R = a + b T + sum g_i E(theta_i/T)`, `E(x) = x^2 e^x/(e^x - 1)^2` (Einstein 1907): translation and rotation
//! in a, vibrations from their characteristic temperatures (Herzberg 1945, from memory; 0.5 % of cp0 at 250..420 K).
//! They enter the flow little: in a developed flow the heating is fixed by viscosity and conductivity alone.

/// Molar gas constant, J/(mol K), exact since the SI of 2019.
pub(crate) const MOLAR_GAS_CONSTANT: f64 = 8.314_462_618_153_24;

/// Heat capacity of an ideal gas.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct IdealGas {
    /// Translation, rotation and the work of expansion, in units of R.
    rigid: f64,
    /// Growth with temperature where vibrations are not listed, 1/K.
    slope: f64,
    /// Vibrations: characteristic temperature, K, and how many share it.
    vibrations: &'static [(f64, f64)],
}

const fn rigid(rigid: f64) -> IdealGas {
    IdealGas { rigid, slope: 0.0, vibrations: &[] }
}

const fn vibrating(rigid: f64, vibrations: &'static [(f64, f64)]) -> IdealGas {
    IdealGas { rigid, slope: 0.0, vibrations }
}

#[rustfmt::skip]
const GASES: &[(&str, IdealGas)] = &[
    ("nitrogen", vibrating(3.5, &[(3393.0, 1.0)])),
    ("oxygen", vibrating(3.5, &[(2273.0, 1.0)])),
    ("air", vibrating(3.49, &[(3393.0, 0.78), (2273.0, 0.21)])), // 0.9 % argon has 2.5
    ("argon", rigid(2.5)),
    ("helium", rigid(2.5)),
    ("neon", rigid(2.5)),
    ("krypton", rigid(2.5)),
    ("xenon", rigid(2.5)),
    // Rotation is not fully excited: 28.84 J/(mol K) at 25 C, 27.4 at -40 C (from memory).
    ("hydrogen", IdealGas { rigid: 3.20, slope: 9.0e-4, vibrations: &[] }),
    ("carbon-dioxide", vibrating(3.5, &[(960.0, 2.0), (1930.0, 1.0), (3380.0, 1.0)])),
    ("methane", vibrating(4.0, &[(1880.0, 3.0), (2207.0, 2.0), (4196.0, 1.0), (4344.0, 3.0)])),
    ("sulfur-hexafluoride", vibrating(4.0, &[(499.0, 3.0), (754.0, 3.0), (885.0, 3.0), (924.0, 2.0), (1114.0, 1.0), (1364.0, 3.0)])),
    // 73.6 J/(mol K) at 25 C, 94 at 400 K (from memory).
    ("propane", IdealGas { rigid: 1.69, slope: 0.024, vibrations: &[] }),
];

impl IdealGas {
    /// The gas of a name; an unknown one is taken as a stiff linear molecule.
    pub fn named(name: &str) -> Self {
        GASES.iter().find(|(known, _)| *known == name).map_or(rigid(3.5), |(_, gas)| *gas)
    }

    /// Enthalpy over R, K, at `temperature` (K): the integral of cp0/R from absolute zero.
    pub fn enthalpy(&self, temperature: f64) -> f64 {
        let vibration = |&(theta, count): &(f64, f64)| count * theta / (theta / temperature).exp_m1();
        temperature * (self.rigid + 0.5 * self.slope * temperature) + self.vibrations.iter().map(vibration).sum::<f64>()
    }

    /// cp0/R at `temperature` (K).
    pub fn capacity(&self, temperature: f64) -> f64 {
        let vibration = |&(theta, count): &(f64, f64)| {
            let x = theta / temperature;
            count * x * x * (-x).exp() / (-x).exp_m1().powi(2)
        };
        self.rigid + self.slope * temperature + self.vibrations.iter().map(vibration).sum::<f64>()
    }
}

/// Heat capacity and conductivity of a liquid, constant over the few kelvin of one case.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LiquidHeat {
    /// Isobaric heat capacity, J/(kg K).
    pub capacity: f64,
    /// Thermal conductivity, W/(m K).
    pub conductivity: f64,
}

impl LiquidHeat {
    /// Water: 4182 J/(kg K), and the conductivity of Ramires et al. (1995), from memory, within 1 % from 0 to 95 C.
    pub fn water(temperature: f64) -> Self {
        let t = temperature / 298.15;
        Self { capacity: 4182.0, conductivity: 0.6065 * (-1.48445 + t * (4.12292 - 1.63866 * t)) }
    }

    /// Mineral oil by Cragoe (1929), from memory, within 5 %: `cp = (1685 + 3.39 t)/sqrt(d)`,
    /// `k = 0.1172 (1 - 0.00054 t)/d`, t in C, d the density over 1000 kg/m3.
    pub fn mineral_oil(temperature: f64, density: f64) -> Self {
        let (t, d) = (temperature - 273.15, density / 1000.0);
        Self { capacity: (1685.0 + 3.39 * t) / d.sqrt(), conductivity: 0.1172 * (1.0 - 0.000_54 * t) / d }
    }

    /// Water with about a third of glycol: 3600 J/(kg K), 0.45 W/(m K) (from memory, within 15 %).
    pub const WATER_GLYCOL: Self = Self { capacity: 3600.0, conductivity: 0.45 };
}
