//! The device's law, nominal geometry, against the virtual element on seeded random cases.
//!
//! Both use the same stored fluids, so this compares hydrodynamics alone: law against a numerical solution along the
//! channel. `EVENBORE_LONG=1` runs ten times as many cases and prints a table of each category.
//!
//! Both walls have the element's temperature. For oil that is a statement about the element: a metal bundle in a
//! large body carries the viscous heat away; an insulated one would read about three times as far off.

use evenbore::fluid::mineral_oil::{OilData, mineral_oil};
use evenbore::fluid::{StoredFluid, catalogue};
use evenbore::quantity::{Density, KinematicViscosity, Length, Temperature};
use evenbore::{Element, double};
use evenbore_bench::virtual_element::{Section, Substance, Upstream, VirtualElement};

/// SplitMix64 (Steele, Lea & Flood 2014): the cases of a seed never change with a dependency.
struct Random(u64);

impl Random {
    /// Uniform from 0 to 1.
    fn unit(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        ((z ^ (z >> 31)) >> 11) as f64 / (1u64 << 53) as f64
    }

    fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.unit()
    }

    /// Uniform in the logarithm.
    fn scale(&mut self, low: f64, high: f64) -> f64 {
        self.between(low.ln(), high.ln()).exp()
    }
}

/// An element twice: for the law and for the virtual element.
struct Twin {
    law: Element,
    truth: VirtualElement,
    words: String,
}

/// Random element; sizes are rounded to single precision, as the law stores them.
fn twin(random: &mut Random, bores: [f64; 2], slenderness: [f64; 2]) -> Twin {
    let single = |value: f64| f64::from(value as f32);
    let across = single(random.scale(bores[0], bores[1]));
    let length = single(across * random.scale(slenderness[0], slenderness[1]));
    let [bore, long] = [across, length].map(|value| Length::from_metres(value as f32));
    let alpha = f64::from(16e-6f32);
    let (law, section, count, shape) = if random.unit() < 0.6 {
        (Element::round_tubes(10, bore, long), Section::RoundTube { bore: across }, 10, "tubes")
    } else {
        let (gap, width) = (single(0.5 * across), single(50.0 * across));
        let law = Element::parallel_plates(Length::from_metres(gap as f32), Length::from_metres(width as f32), long);
        (law, Section::ParallelPlates { gap, width }, 1, "plates")
    };
    let law = law.unwrap().with_expansion(16e-6, Temperature::from_kelvin(293.15)).unwrap();
    let reference = f64::from(law.reference_temperature().as_kelvin());
    let truth = VirtualElement::new(section, count, length).unwrap().with_expansion(alpha, reference).unwrap();
    Twin { law, truth, words: format!("{shape} Dh {:.3} mm L/Dh {:.0}", across * 1e3, length / across) }
}

/// One comparison: relative error of the law's mass flow, and the case in words.
type Row = (f64, String);

/// Compares at a pressure drop; none where the law says the flow is not laminar or either refuses.
fn compare(twin: &Twin, fluid: &StoredFluid, t: f64, p: f64, drop: f64) -> Option<Row> {
    let law = double::Conditions::new(&twin.law, fluid, t, p, None).ok()?.flow(drop).ok()?;
    let reynolds = f64::from(twin.law.reynolds(law.x as f32));
    if reynolds > 1800.0 {
        return None;
    }
    let truth = twin.truth.flow(&Substance::new(fluid), &Upstream::at(p, t), drop).ok()?;
    let words = format!(
        "{}, {} {:.1} C {:.1} kPa drop {:.1} Pa, Re {reynolds:.0}, ln {:.3}, slip {:.4}, kinetic {:.4}",
        twin.words,
        fluid.name(),
        t - 273.15,
        p / 1e3,
        drop,
        law.log_ratio,
        law.slip,
        law.kinetic_share
    );
    Some((law.mass / truth.mass_flow - 1.0, words))
}

/// How many cases of a category to run.
fn cases(usual: usize) -> usize {
    if long() { 10 * usual } else { usual }
}

fn long() -> bool {
    std::env::var_os("EVENBORE_LONG").is_some_and(|value| value == "1")
}

/// Draws until enough comparisons came out, then holds the worst of them to a limit.
fn judge(name: &str, wanted: usize, limit: f64, mut draw: impl FnMut() -> Option<Row>) {
    let mut rows: Vec<Row> = (0..40 * wanted).filter_map(|_| draw()).take(wanted).collect();
    assert_eq!(rows.len(), wanted, "{name}: too few cases came out");
    let rms = (rows.iter().map(|(error, _)| error * error).sum::<f64>() / wanted as f64).sqrt();
    rows.sort_by(|a, b| b.0.abs().total_cmp(&a.0.abs()));
    println!("{name}: {wanted} cases, worst {:+.4} % ({}), rms {:.4} %", rows[0].0 * 100.0, rows[0].1, rms * 100.0);
    if long() {
        for (error, words) in &rows {
            println!("    {:+.4} %  {words}", error * 100.0);
        }
    }
    assert!(rows[0].0.abs() < limit, "{name}: {:+.4} % at {}", rows[0].0 * 100.0, rows[0].1);
}

/// A gas case with ln(p1/p2) in a range.
fn gas(random: &mut Random, [low, high]: [f64; 2], bores: [f64; 2]) -> Option<Row> {
    let gases =
        [&catalogue::NITROGEN, &catalogue::AIR, &catalogue::ARGON, &catalogue::HELIUM, &catalogue::CARBON_DIOXIDE];
    let fluid = gases[(5.0 * random.unit()) as usize].fluid();
    let twin = twin(random, bores, [100.0, 500.0]);
    let (t, p) = (random.between(273.15, 333.15), random.scale(80e3, 300e3));
    let ratio = random.scale(low, high);
    compare(&twin, fluid, t, p, -p * (-ratio).exp_m1())
}

#[test]
fn gas_that_loses_little_pressure() {
    let mut random = Random(1);
    judge("gas, ln < 0.1", cases(16), 3e-4, || gas(&mut random, [1e-3, 0.1], [0.1e-3, 0.8e-3]));
}

#[test]
fn gas_that_loses_half_its_pressure() {
    let mut random = Random(2);
    judge("gas, ln 0.1 to 0.8", cases(12), 2e-3, || gas(&mut random, [0.1, 0.8], [0.05e-3, 0.3e-3]));
}

#[test]
fn water() {
    let mut random = Random(3);
    judge("water", cases(10), 1e-4, || {
        let twin = twin(&mut random, [0.2e-3, 1e-3], [100.0, 400.0]);
        let (t, drop) = (random.between(278.15, 333.15), random.scale(10.0, 15e3));
        compare(&twin, catalogue::WATER.fluid(), t, 150e3, drop)
    });
}

/// An ISO VG 32 oil of our own.
fn workshop_oil() -> StoredFluid {
    let at = |c, nu| (Temperature::from_celsius(c), KinematicViscosity::from_square_millimetres_per_second(nu));
    mineral_oil(&OilData {
        name: "workshop-oil",
        viscosities: [at(40.0, 32.0), at(100.0, 5.4)],
        density: (Temperature::from_celsius(15.0), Density::from_kilograms_per_cubic_metre(870.0)),
        expansion_per_kelvin: 7.3e-4,
        u_viscosity: 0.005,
    })
    .unwrap()
}

#[test]
fn oil() {
    let (mut random, oil) = (Random(4), workshop_oil());
    judge("oil", cases(10), 8e-4, || {
        let twin = twin(&mut random, [0.5e-3, 2e-3], [100.0, 400.0]);
        let (t, drop) = (random.between(283.15, 353.15), random.scale(300.0, 60e3));
        compare(&twin, &oil, t, 200e3, drop)
    });
}
