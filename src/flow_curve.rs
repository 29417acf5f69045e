//! The fast arithmetic: one temperature and line pressure as a curve in pressure drop, integers inside, f32 outside.
//!
//! At fixed conditions the complete law is a smooth function of the pressure drop alone. `g = q_V/dP` is sampled by
//! [`Conditions::sample`] at the Chebyshev nodes of six segments (five octaves below the curve's end and the rest down
//! to zero, so that the root's curvature near small drops is met), degree six each, and kept as 32-bit fixed point. A
//! sample then costs eight 32-bit products and no root, exponential, division or floating-point arithmetic, on machines
//! with and without a floating-point unit alike; the bits are the same on all of them. It is a choice that the record
//! names (`Arithmetic::Curve`), since its bits differ from those of single precision.
//!
//! Accuracy: 1 ppm of the double-precision law wherever the curve serves (asserted in `tests/flow_curve.rs`).
//! Pressure drops that are negative, below 1e-30 Pa or beyond the curve are computed by [`Conditions::sample`].

use crate::conditions::{Conditions, Sample};
use crate::math::{upper, upper_signed};
use crate::quantity::{MassFlow, PressureDrop, VolumeFlow};
use crate::status::{Refusal, Status};

/// Which arithmetic computes the flow; named in the record so that certificate and instrument agree to the bit.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize), serde(rename_all = "kebab-case"))]
pub enum Arithmetic {
    /// The law as written, in IEEE 754 single precision.
    Single,
    /// A curve over pressure drop per temperature and line pressure, integers inside ([`FlowCurve`]).
    Curve,
}

/// Octaves of the curve, from its end down.
const OCTAVES: usize = 5;
/// Coefficients of a segment: degree six.
const TERMS: usize = 7;

/// Chebyshev nodes on -1/2..1/2: `cos((2 i + 1) pi/14)/2`.
const NODES: [f32; TERMS] =
    [0.487_463_95, 0.390_915_75, 0.216_941_87, 0.0, -0.216_941_87, -0.390_915_75, -0.487_463_95];

/// 1 as a coefficient: 30 bits of fraction.
const ONE: f32 = (1 << 30) as f32;

/// Sum of the exponents of a pressure drop and of g's unit from which the flow is a normal number for certain.
const SHORTEST_EXPONENT: i32 = 8;

/// A sample of the law with its flows replaced by those of the curve.
///
/// # Errors
/// Refuses what [`Conditions::sample`] refuses.
#[inline(never)] // a curve's stack stays out of the walk that needs none
pub(crate) fn by_curve(conditions: &Conditions, exact: Sample, drop: PressureDrop) -> Result<Sample, Refusal> {
    let Ok(curve) = FlowCurve::of(conditions) else { return Ok(exact) };
    let Quick { volume, status } = curve.sample(drop)?;
    let (mass, standard) = conditions.other_flows(volume);
    Ok(Sample { volume, mass, standard, status, ..exact })
}

/// A flow by the fast arithmetic.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Quick {
    /// Volume flow at the temperature and line pressure of the curve.
    pub volume: VolumeFlow,
    /// What the flow is worth.
    pub status: Status,
}

/// A curve of volume flow over pressure drop, valid at one temperature, line pressure and humidity.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct FlowCurve {
    conditions: Conditions,
    /// g over its power of two, by falling power of the place in the segment.
    octaves: [[i32; TERMS]; OCTAVES],
    /// The same below the octaves.
    lowest: [i32; TERMS],
    /// 2^63 over the mantissa of the curve's end.
    reciprocal: u32,
    /// Stored exponent of the curve's end.
    end_exponent: u32,
    /// What a pressure drop's stored exponent lacks of the exponent of its flow.
    flow_exponent: u32,
    /// Pressure drops that the curve serves: the smallest, and how far the largest lies above it.
    least: u32,
    reach: u32,
    /// Flows and pressure drops above which a flag is raised.
    laminar: u32,
    range: u32,
    expansion: u32,
    slip: u32,
    /// The lowest flow and the lowest pressure drop among them.
    quiet_flow: u32,
    quiet_drop: u32,
    standing: Status,
}

/// Stored exponent e and mantissa m (top bit set) of a positive normal number `m 2^(e - 158)`.
const fn parts(bits: u32) -> (u32, u32) {
    (bits >> 23, (bits << 8) | 0x8000_0000)
}

/// Bits of `product 2^exponent`, rounded to nearest; the caller sees to it that the result is normal.
const fn assemble(exponent: u32, product: u32) -> u32 {
    (product as f32).to_bits().wrapping_add(exponent.wrapping_shl(23))
}

/// 2 to an exponent, if that is a normal number.
const fn power_of_two(exponent: i32) -> Option<f32> {
    if exponent > -126 && exponent < 127 { Some(f32::from_bits(((exponent + 127) as u32) << 23)) } else { None }
}

/// g = q_V/dP at a pressure drop (Pa) by the law, m3/(s Pa).
fn conductance(conditions: &Conditions, drop: f32) -> Result<f32, Refusal> {
    let sample = conditions.sample(PressureDrop::from_pascals(drop))?;
    Ok(sample.volume.as_cubic_metres_per_second() / drop)
}

/// Fixed-point coefficients, by falling power, of g/unit between two pressure drops.
fn segment(conditions: &Conditions, low: f32, high: f32, unit: f32) -> Result<[i32; TERMS], Refusal> {
    let (middle, width) = (0.5 * (low + high), high - low);
    let mut values = [0.0; TERMS];
    for (value, node) in values.iter_mut().zip(NODES) {
        *value = conductance(conditions, middle + width * node)? / unit;
    }
    let mut fixed = [0; TERMS];
    for (place, c) in fixed.iter_mut().rev().zip(polynomial(values)) {
        *place = (c * ONE) as i32;
    }
    Ok(fixed)
}

/// Polynomial through the nodes, by rising power (Newton's divided differences, then expanded).
fn polynomial(values: [f32; TERMS]) -> [f32; TERMS] {
    let mut differences = values;
    for order in 1..TERMS {
        let previous = differences;
        let pairs = previous.iter().zip(previous.iter().skip(1)).skip(order - 1);
        let spans = NODES.iter().zip(NODES.iter().skip(order));
        for ((place, (low, high)), (from, to)) in differences.iter_mut().skip(order).zip(pairs).zip(spans) {
            *place = (high - low) / (to - from);
        }
    }
    let mut rising = [0.0; TERMS];
    for (difference, node) in differences.iter().rev().zip(NODES.iter().rev()) {
        // rising = rising (t - node) + difference
        let mut carried = *difference;
        for place in &mut rising {
            let here = *place;
            *place = carried - node * here;
            carried = here;
        }
    }
    rising
}

impl FlowCurve {
    /// Prepares the curve from 0 to `end`, the largest pressure drop it has to serve: 44 samples of the law.
    ///
    /// # Errors
    /// Refuses an `end` that is not a positive pressure drop the conditions can serve.
    ///
    /// ```
    /// use evenbore::flow_curve::FlowCurve;
    /// use evenbore::quantity::{AbsolutePressure, Length, PressureDrop, Temperature};
    /// use evenbore::{Element, Meter, fluid::catalogue::NITROGEN};
    /// let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?;
    /// let meter = Meter::nominal(element, NITROGEN.fluid())?;
    /// let conditions =
    ///     meter.conditions(Temperature::from_celsius(20.0), AbsolutePressure::from_kilopascals(120.0), None)?;
    /// let curve = FlowCurve::new(&conditions, PressureDrop::from_pascals(2500.0))?;
    /// let drop = PressureDrop::from_pascals(1234.5);
    /// let (quick, exact) = (curve.sample(drop)?.volume, conditions.sample(drop)?.volume);
    /// let ratio = quick.as_cubic_metres_per_second() / exact.as_cubic_metres_per_second();
    /// assert!((ratio - 1.0).abs() < 1e-6);
    /// # Ok::<(), Box<dyn core::error::Error>>(())
    /// ```
    pub fn new(conditions: &Conditions, end: PressureDrop) -> Result<Self, Refusal> {
        let drop = end.as_pascals();
        if !drop.is_normal() || drop < 0.0 {
            return Err(Refusal::NOT_FINITE);
        }
        conditions.sample(end)?;
        // g is largest at small pressure drops; the power of two above it makes it 1/2 to 1 there.
        let largest = conductance(conditions, 1e-4 * drop)?;
        let unit_exponent = (largest.to_bits() >> 23) as i32 - 126;
        let unit = power_of_two(unit_exponent).ok_or(Refusal::NOT_FINITE)?;
        let mut octaves = [[0; TERMS]; OCTAVES];
        let mut top = drop;
        for octave in &mut octaves {
            *octave = segment(conditions, 0.5 * top, top, unit)?;
            top *= 0.5;
        }
        let (end_exponent, mantissa) = parts(drop.to_bits());
        let limits = conditions.limits();
        let [laminar, range, expansion, slip] =
            [limits.laminar, limits.range, limits.expansion, limits.slip].map(f32::to_bits);
        // Below this a flow would be too small for a normal number.
        let least = (SHORTEST_EXPONENT - unit_exponent).max(1) as u32 * (1 << 23);
        Ok(Self {
            conditions: *conditions,
            octaves,
            lowest: segment(conditions, 0.0, top, unit)?,
            reciprocal: ((1_u64 << 63) / u64::from(mantissa)).min(u64::from(u32::MAX)) as u32,
            end_exponent,
            flow_exponent: (unit_exponent - 156) as u32,
            least,
            reach: drop.to_bits().saturating_sub(least),
            laminar,
            range,
            expansion,
            slip,
            quiet_flow: laminar.min(range),
            quiet_drop: expansion.min(slip),
            standing: limits.standing,
        })
    }

    /// The curve of these conditions, ending where the flow stops being laminar or calibrated, or loses half its
    /// pressure: the one an instrument and its certificate share.
    ///
    /// # Errors
    /// Refuses conditions at which nothing can flow.
    pub fn of(conditions: &Conditions) -> Result<Self, Refusal> {
        Self::new(conditions, PressureDrop::from_pascals(conditions.curve_end()))
    }

    /// The conditions the curve was prepared for.
    pub const fn conditions(&self) -> &Conditions {
        &self.conditions
    }

    /// The flow that a pressure drop (trimmed) drives.
    ///
    /// # Errors
    /// Refuses what [`Conditions::sample`] refuses.
    #[inline]
    pub fn sample(&self, pressure_drop: PressureDrop) -> Result<Quick, Refusal> {
        let bits = pressure_drop.as_pascals().to_bits();
        // Positive numbers compare as their bits; negative ones and NaN come out beyond every end.
        if bits.wrapping_sub(self.least) > self.reach {
            return self.exact(pressure_drop);
        }
        let flow = self.evaluate(bits);
        let quiet = flow <= self.quiet_flow && bits <= self.quiet_drop;
        let status = if quiet { self.standing } else { self.flags(bits, flow) };
        Ok(Quick { volume: VolumeFlow::from_cubic_metres_per_second(f32::from_bits(flow)), status })
    }

    /// The flags of a pressure drop and a flow.
    #[cold]
    fn flags(&self, drop: u32, flow: u32) -> Status {
        let mut status = self.standing;
        status.set(Status::NOT_LAMINAR, flow > self.laminar);
        status.set(Status::BEYOND_CALIBRATION, flow > self.range);
        status.set(Status::STRONG_EXPANSION, drop > self.expansion);
        status.set(Status::STRONG_SLIP, drop > self.slip);
        status
    }

    /// Mass flow, and dry flow at the reference conditions, of a volume flow of this curve.
    pub fn other_flows(&self, volume: VolumeFlow) -> (MassFlow, Option<VolumeFlow>) {
        self.conditions.other_flows(volume)
    }

    /// Bits of the volume flow at the bits of a pressure drop within the curve.
    #[inline]
    fn evaluate(&self, bits: u32) -> u32 {
        let (exponent, mantissa) = parts(bits);
        // Drop over end is `ratio 2^-31` shifted down by the exponents' difference; its octave and the place in it.
        let ratio = upper(mantissa, self.reciprocal);
        let below = self.end_exponent - exponent;
        let high = ratio >> 31;
        let octave = (below - high) as usize;
        let (t, [c6, c5, c4, c3, c2, c1, c0]) = match self.octaves.get(octave) {
            // The octave's lower end has ratio 2^30 after this shift, its middle 3/2 of it.
            Some(segment) => (((ratio >> high) << 2) ^ 0x8000_0000, segment),
            None => {
                (ratio.checked_shr(below - OCTAVES as u32).unwrap_or(0).wrapping_shl(1) ^ 0x8000_0000, &self.lowest)
            }
        };
        let t = t as i32;
        let g = upper_signed(*c6, t).wrapping_add(*c5);
        let g = upper_signed(g, t).wrapping_add(*c4);
        let g = upper_signed(g, t).wrapping_add(*c3);
        let g = upper_signed(g, t).wrapping_add(*c2);
        let g = upper_signed(g, t).wrapping_add(*c1);
        let g = upper_signed(g, t).wrapping_add(*c0);
        assemble(exponent.wrapping_add(self.flow_exponent), upper(mantissa, g as u32))
    }

    /// By the law itself, off the curve.
    #[cold]
    #[inline(never)]
    fn exact(&self, pressure_drop: PressureDrop) -> Result<Quick, Refusal> {
        let Sample { volume, status, .. } = self.conditions.sample(pressure_drop)?;
        Ok(Quick { volume, status })
    }
}
