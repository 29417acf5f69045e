//! The element: channels in parallel between two plenums, and the flow through all of them.

use super::grid::Grid;
use super::march::{Channel, Resolution, Station, Wall};
use super::refused::{Refused, within};
use super::search::{drop_of, flow};
use super::section::Section;
use super::spread::Spread;
use super::substance::Substance;
use crate::input::element_file::{ElementFile, Shape};

/// Reynolds number above which a real flow may not be laminar; beyond it a result is flagged.
pub const LAMINAR_LIMIT: f64 = 2000.0;

/// Channels of one shape in parallel.
#[derive(Debug, Clone, PartialEq)]
pub struct VirtualElement {
    section: Section,
    count: f64,
    length: f64,
    expansion: f64,
    reference_temperature: f64,
    spread: Spread,
    wall: Wall,
    resolution: Resolution,
}

/// Conditions at the element: pressure and temperature of the upstream plenum, temperature of the wall.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Upstream {
    /// Absolute pressure of the plenum, Pa.
    pub pressure: f64,
    /// Temperature of the fluid in the plenum, K.
    pub temperature: f64,
    /// Temperature of the element, K.
    pub wall_temperature: f64,
}

impl Upstream {
    /// A fluid that arrives at the element's temperature (K); `pressure` in Pa.
    pub const fn at(pressure: f64, temperature: f64) -> Self {
        Self { pressure, temperature, wall_temperature: temperature }
    }
}

/// What flows, and how.
#[derive(Debug, Clone, PartialEq)]
pub struct Outcome {
    /// Mass flow through all channels, kg/s, with the sign of the pressure drop.
    pub mass_flow: f64,
    /// Volume flow at the pressure and temperature of the upstream plenum, m3/s.
    pub volume_flow: f64,
    /// Pressure drop, plenum to outlet, Pa.
    pub pressure_drop: f64,
    /// Reynolds number of the largest channel, with the viscosity at the inlet.
    pub reynolds: f64,
    /// Mach number of the mean velocity at the outlet of the largest channel; 0 for a liquid.
    pub mach: f64,
    /// Whether the Reynolds number exceeds [`LAMINAR_LIMIT`]: a real element may be turbulent here.
    pub beyond_laminar: bool,
    /// Where the march through the largest channel passed, inlet first; empty without flow.
    pub stations: Vec<Station>,
}

impl VirtualElement {
    /// `count` channels of one section and length (m), at 20 C, without thermal expansion or spread, with an isothermal
    /// wall.
    ///
    /// # Errors
    /// Names the size outside 1 um..50 mm (bore or gap), 0.1 mm..10 m (length) or 1..1e6 (count).
    ///
    /// ```
    /// use evenbore::fluid::catalogue::NITROGEN;
    /// use evenbore_bench::virtual_element::{Section, Substance, Upstream, VirtualElement};
    /// let element = VirtualElement::new(Section::RoundTube { bore: 0.5e-3 }, 100, 0.1)?;
    /// let nitrogen = Substance::new(NITROGEN.fluid());
    /// let outcome = element.flow(&nitrogen, &Upstream::at(120e3, 293.15), 1000.0)?;
    /// assert!((outcome.volume_flow * 6e4 - 5.1).abs() < 0.1, "{} L/min", outcome.volume_flow * 6e4);
    /// # Ok::<(), evenbore_bench::virtual_element::Refused>(())
    /// ```
    pub fn new(section: Section, count: u32, length: f64) -> Result<Self, Refused> {
        let (name, across) = match section {
            Section::RoundTube { bore } => ("bore (m)", bore),
            Section::ParallelPlates { gap, width } => {
                within("width (m)", width, 1e-4, 1000.0)?;
                ("gap (m)", gap)
            }
        };
        within(name, across, 1e-6, 0.05)?;
        Ok(Self {
            section,
            count: within("count", f64::from(count), 1.0, 1e6)?,
            length: within("length (m)", length, 1e-4, 10.0)?,
            expansion: 0.0,
            reference_temperature: 293.15,
            spread: Spread::none(),
            wall: Wall::Isothermal,
            resolution: Resolution::FINE,
        })
    }

    /// The element that a file describes.
    ///
    /// # Errors
    /// The shape is "other", or a size is outside its limits.
    pub fn from_file(file: &ElementFile) -> Result<Self, Refused> {
        let mm = |value: f64| value * 1e-3;
        let (section, count) = match file.shape {
            Shape::RoundTubes { bore_mm } => (Section::RoundTube { bore: mm(bore_mm) }, file.count),
            // The width of a file is that of all slots together.
            Shape::ParallelPlates { gap_mm, width_mm } => {
                (Section::ParallelPlates { gap: mm(gap_mm), width: mm(width_mm) }, 1)
            }
            Shape::Other { .. } => return Err(Refused::UnknownChannels),
        };
        let element = Self::new(section, count, mm(file.length_mm))?;
        element.with_expansion(file.expansion_per_k, file.reference_temperature_c + 273.15)
    }

    /// The same element with linear thermal expansion (1/K), its sizes holding at `reference` (K).
    ///
    /// # Errors
    /// Names the value outside -1e-4..1e-3 1/K or 100..1000 K.
    pub fn with_expansion(self, per_kelvin: f64, reference: f64) -> Result<Self, Refused> {
        let expansion = within("expansion (1/K)", per_kelvin, -1e-4, 1e-3)?;
        let reference_temperature = within("reference temperature (K)", reference, 100.0, 1000.0)?;
        Ok(Self { expansion, reference_temperature, ..self })
    }

    /// The same element with channels of unequal bore.
    pub fn with_spread(self, spread: Spread) -> Self {
        Self { spread, ..self }
    }

    /// The same element with another thermal wall.
    pub fn with_wall(self, wall: Wall) -> Self {
        Self { wall, ..self }
    }

    /// The same element computed at another resolution.
    ///
    /// # Errors
    /// Names the setting outside 8..96 (degree), 1e-12..1e-3 (first step), 1.01..2 (growth) or 1e-3..0.5 (longest step).
    pub fn with_resolution(self, resolution: Resolution) -> Result<Self, Refused> {
        within("degree", resolution.degree as f64, 8.0, 96.0)?;
        within("first step", resolution.first_step, 1e-12, 1e-3)?;
        within("growth of the steps", resolution.growth, 1.01, 2.0)?;
        within("longest step", resolution.longest_step, 1e-3, 0.5)?;
        Ok(Self { resolution, ..self })
    }

    /// The flow that a pressure drop (Pa) drives; a negative one drives it backwards, `upstream` then being where it
    /// comes from.
    ///
    /// # Errors
    /// The case is impossible: vacuum at the outlet, Mach above 0.3, a state outside the fluid's table.
    pub fn flow(&self, substance: &Substance<'_>, upstream: &Upstream, drop: f64) -> Result<Outcome, Refused> {
        within("pressure drop (Pa)", drop.abs(), 0.0, 1e8)?;
        self.check(upstream)?;
        if drop == 0.0 {
            substance.check(upstream.temperature, upstream.pressure)?;
            return Ok(self.outcome(substance, upstream, 0.0, 0.0, 0.0, Vec::new()));
        }
        let (mut mass_flow, mut largest) = (0.0, None);
        for (factor, share) in self.spread.classes() {
            let channel = self.channel(substance, upstream, factor);
            let found = flow(&channel, drop.abs(), &self.resolution)?;
            mass_flow += self.count * share * found.mass_flow;
            largest = Some(found); // classes come smallest first
        }
        let (one, stations) = largest.map_or((0.0, Vec::new()), |found| (found.mass_flow, found.stations));
        Ok(self.outcome(substance, upstream, drop, mass_flow * drop.signum(), one, stations))
    }

    /// The pressure drop that drives a mass flow (kg/s) through channels of equal bore.
    ///
    /// # Errors
    /// The case is impossible, or the bores are spread: then only [`Self::flow`] is defined.
    pub fn pressure_drop(
        &self,
        substance: &Substance<'_>,
        upstream: &Upstream,
        mass_flow: f64,
    ) -> Result<Outcome, Refused> {
        within("mass flow (kg/s)", mass_flow.abs(), 0.0, 1e6)?;
        within("bore spread", self.spread.relative(), 0.0, 0.0)?;
        self.check(upstream)?;
        if mass_flow == 0.0 {
            return self.flow(substance, upstream, 0.0);
        }
        let channel = self.channel(substance, upstream, 1.0);
        let one = mass_flow.abs() / self.count;
        let stations = channel.march(one, &Grid::new(self.resolution.degree), &self.resolution)?;
        let drop = drop_of(&channel, &stations) * mass_flow.signum();
        Ok(self.outcome(substance, upstream, drop, mass_flow, one, stations))
    }

    /// Reynolds number of a mass flow (kg/s) through channels all alike, as drawn, at a viscosity (Pa s).
    pub fn reynolds(&self, mass_flow: f64, viscosity: f64) -> f64 {
        mass_flow.abs() / (self.count * self.section.area()) * self.section.hydraulic_diameter() / viscosity
    }

    fn check(&self, upstream: &Upstream) -> Result<(), Refused> {
        within("absolute pressure (Pa)", upstream.pressure, 1.0, 1e9)?;
        within("temperature of the fluid (K)", upstream.temperature, 1.0, 3000.0)?;
        within("temperature of the element (K)", upstream.wall_temperature, 1.0, 3000.0)?;
        Ok(())
    }

    /// One channel at the element's temperature, its bore multiplied by `factor`.
    fn channel<'a>(&self, substance: &Substance<'a>, upstream: &Upstream, factor: f64) -> Channel<'a> {
        let stretch = 1.0 + self.expansion * (upstream.wall_temperature - self.reference_temperature);
        Channel {
            section: self.section.with_bore_factor(factor).stretched(stretch),
            length: self.length * stretch,
            substance: *substance,
            wall: self.wall,
            wall_temperature: upstream.wall_temperature,
            pressure: upstream.pressure,
            temperature: upstream.temperature,
        }
    }

    fn outcome(
        &self,
        substance: &Substance<'_>,
        upstream: &Upstream,
        pressure_drop: f64,
        mass_flow: f64,
        one: f64,
        stations: Vec<Station>,
    ) -> Outcome {
        let (t, p) = (upstream.temperature, upstream.pressure);
        let state = substance.state(t, p, &substance.reference(t, p));
        let section = self.channel(substance, upstream, self.spread.largest()).section;
        let reynolds = one / section.area() * section.hydraulic_diameter() / state.viscosity;
        Outcome {
            mass_flow,
            volume_flow: mass_flow / state.density,
            pressure_drop,
            reynolds,
            mach: stations.last().map_or(0.0, |outlet| outlet.mach),
            beyond_laminar: reynolds > LAMINAR_LIMIT,
            stations,
        }
    }
}
