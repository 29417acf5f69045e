//! A scenario into rows: truth first, segment by segment, then what the sensors say of it.

use super::fault::{Channel, Fault, Kind};
use super::moist_air::moist_air;
use super::physical::{impossible, water_vapour_pressure};
use super::scenario::{Drive, Scenario, Segment};
use super::sensor::Sensor;
use super::truth::Truth;
use crate::input::element_file::Shape;
use crate::input::problem::Problem;
use crate::random::Random;
use crate::resources::fluids::Fluids;
use crate::virtual_element::{Refused, Section, Spread, VirtualElement};
use evenbore::double::Properties;
use evenbore::fluid::StoredFluid;
use std::fmt::Write;

/// Phases over which a pulsation is averaged.
const PHASES: usize = 24;

/// A reading and the truth beside it, SI; a reading that is not there is none.
#[derive(Debug, Clone, PartialEq)]
pub struct Row {
    /// s.
    pub time: f64,
    /// Name of the declared fluid.
    pub fluid: String,
    /// In the order of [`Channel::ALL`].
    pub readings: [Option<f64>; 5],
    /// True volume flow through the element at its inlet, m3/s.
    pub volume_flow: f64,
    /// True mass flow through the element, kg/s.
    pub mass_flow: f64,
    /// Names of the faults that act.
    pub faults: Vec<&'static str>,
}

/// All rows of a scenario, and what they rest on.
#[derive(Debug, Clone, PartialEq)]
pub struct Simulated {
    /// In the order of time.
    pub rows: Vec<Row>,
    /// Which columns there are, in the order of [`Channel::ALL`].
    pub columns: [bool; 5],
    /// Largest relative error of an interpolated flow, as found by checks.
    pub interpolation_error: f64,
}

/// A moment of a segment: where on its way from 0 to 1, and what is true there.
#[derive(Debug, Clone, Copy)]
struct Moment {
    time: f64,
    drive: f64,
    temperature: f64,
    pressure: f64,
}

/// What truly happens at a moment.
#[derive(Debug, Clone, Copy)]
struct Happening {
    mass_flow: f64,
    volume_flow: f64,
    drop: f64,
}

/// Makes the rows; `progress` is told the number of segments done and of all.
///
/// # Errors
/// Names the line of a segment that cannot be, with the physical reason.
pub fn simulate(scenario: &Scenario, progress: &dyn Fn(usize, usize)) -> Result<Simulated, Problem> {
    let fluids = Fluids::open(scenario.fluids.as_deref())?;
    let element = element(scenario).map_err(|refused| Problem::new(&scenario.file, refused.to_string()))?;
    let mut simulated =
        Simulated { rows: Vec::new(), columns: scenario.sensors.map(|s| s.is_some()), interpolation_error: 0.0 };
    let mut readers = Readers::new(scenario);
    let mut start = 0.0;
    for (i, segment) in scenario.segments.iter().enumerate() {
        progress(i, scenario.segments.len());
        let at = |reason: String| {
            let problem = Problem::new(&scenario.file, format!("this segment cannot be: {reason}"));
            match segment.line {
                Some(line) => problem.at_line(line),
                None => problem,
            }
        };
        let moments = moments(segment, start, scenario.interval);
        let (happenings, water, error) = happen(scenario, segment, &element, &fluids, &moments).map_err(at)?;
        simulated.interpolation_error = simulated.interpolation_error.max(error);
        for (moment, happening) in moments.iter().zip(happenings) {
            simulated.rows.push(readers.row(segment, moment, &happening, water));
        }
        start += segment.duration;
    }
    progress(scenario.segments.len(), scenario.segments.len());
    Ok(simulated)
}

/// The element as made.
fn element(scenario: &Scenario) -> Result<VirtualElement, Refused> {
    let (drawn, [factor, spread]) = (&scenario.element, scenario.bundle);
    let (section, count) = match drawn.shape {
        Shape::RoundTubes { bore_mm } => (Section::RoundTube { bore: bore_mm * 1e-3 * factor }, drawn.count),
        Shape::ParallelPlates { gap_mm, width_mm } => {
            (Section::ParallelPlates { gap: gap_mm * 1e-3 * factor, width: width_mm * 1e-3 }, 1)
        }
        Shape::Other { .. } => return Err(Refused::UnknownChannels),
    };
    let made = VirtualElement::new(section, count, drawn.length_mm * 1e-3)?;
    let made = made.with_expansion(drawn.expansion_per_k, drawn.reference_temperature_c + 273.15)?;
    Ok(made.with_spread(Spread::normal(spread)?))
}

fn moments(segment: &Segment, start: f64, interval: f64) -> Vec<Moment> {
    let n = ((segment.duration / interval).round() as usize).max(1);
    let moment = |i: usize| {
        let share = if n > 1 { i as f64 / (n - 1) as f64 } else { 0.0 };
        let on = |[from, to]: [f64; 2]| from + (to - from) * share;
        Moment {
            time: start + i as f64 * interval,
            drive: on(segment.way),
            temperature: on(segment.temperature),
            pressure: on(segment.line_pressure),
        }
    };
    (0..n).map(moment).collect()
}

fn span(values: impl Iterator<Item = f64>) -> [f64; 2] {
    values.fold([f64::INFINITY, f64::NEG_INFINITY], |[low, high], v| [low.min(v), high.max(v)])
}

/// What happens at each moment, the mole fraction of water, and the error of the interpolation.
fn happen(
    scenario: &Scenario,
    segment: &Segment,
    element: &VirtualElement,
    fluids: &Fluids,
    moments: &[Moment],
) -> Result<(Vec<Happening>, Option<f64>, f64), String> {
    let declared = fluids.find(&segment.fluid)?;
    let first =
        Moment { time: 0.0, drive: 0.0, temperature: segment.temperature[0], pressure: segment.line_pressure[0] };
    let outlet =
        |moment: &Moment| moment.pressure - if segment.drive == Drive::PressureDrop { moment.drive } else { 0.0 };
    let reason = |moment: &Moment| impossible(declared, moment.temperature, moment.pressure, outlet(moment));
    if let Some(why) = moments.iter().chain([&first]).find_map(reason) {
        return Err(why);
    }
    let water =
        segment.relative_humidity.map(|share| share * water_vapour_pressure(first.temperature) / first.pressure);
    let moist = water.map(moist_air).transpose().map_err(|error| error.to_string())?;
    if let Some(x) = water {
        let wet = moments.iter().find(|m| x * m.pressure > 1.0005 * water_vapour_pressure(m.temperature));
        if let Some(wet) = wet {
            let (t, p) = (wet.temperature - 273.15, wet.pressure / 1e3);
            return Err(format!("water condenses out of this air at {t:.2} C and {p:.3} kPa: two phases"));
        }
    }
    let usual = moist.as_ref().unwrap_or(declared);
    let mut happenings = vec![None; moments.len()];
    let mut error: f64 = 0.0;
    let wrong = |m: &Moment| {
        scenario.faults.iter().find_map(|fault| match &fault.kind {
            Kind::WrongGas(name) if fault.acts(m.time) => Some(name.as_str()),
            _ => None,
        })
    };
    let mut names: Vec<Option<&str>> = moments.iter().map(wrong).collect();
    names.sort_unstable();
    names.dedup();
    for name in names {
        let fluid = name.map_or(Ok(usual), |name| fluids.find(name))?;
        let of_fluid: Vec<usize> = (0..moments.len()).filter(|&i| wrong(&moments[i]) == name).collect();
        let chosen: Vec<Moment> = of_fluid.iter().map(|&i| moments[i]).collect();
        let (found, worst) =
            flows(scenario, segment, element, fluid, &chosen).map_err(|refused| why(&refused, fluid))?;
        error = error.max(worst);
        for (i, happening) in of_fluid.into_iter().zip(found) {
            happenings[i] = Some(happening);
        }
    }
    Ok((happenings.into_iter().flatten().collect(), water, error))
}

/// The physical reason of a refusal.
fn why(refused: &Refused, fluid: &StoredFluid) -> String {
    match refused {
        Refused::Choking { .. } => format!("{} gets too fast: {refused}", fluid.name()),
        Refused::Vacuum { .. } => format!("the outlet would be a vacuum: {refused}"),
        _ => refused.to_string(),
    }
}

/// Flows of one fluid at its moments.
fn flows(
    scenario: &Scenario,
    segment: &Segment,
    element: &VirtualElement,
    fluid: &StoredFluid,
    moments: &[Moment],
) -> Result<(Vec<Happening>, f64), Refused> {
    let density = |t: f64, p: f64| Properties::at(fluid, t).density(p);
    let target = |m: &Moment| match segment.drive {
        Drive::VolumeFlow => m.drive * density(m.temperature, m.pressure),
        _ => m.drive,
    };
    let temperatures = span(moments.iter().map(|m| m.temperature));
    let pressures = span(moments.iter().map(|m| m.pressure));
    let mut drops = span(moments.iter().map(|m| m.drive));
    if segment.drive != Drive::PressureDrop {
        drops = [f64::INFINITY, 0.0];
        let targets = span(moments.iter().map(target));
        for t in temperatures {
            for p in pressures {
                let one = Truth::new(element, fluid, [[0.0, 1.0], [t; 2], [p; 2]], 1)?;
                let ends = [one.pressure_drop(targets[0], [t, p])?, one.pressure_drop(targets[1], [t, p])?];
                drops = [drops[0].min(ends[0]), drops[1].max(ends[1])];
            }
        }
        if temperatures[0] < temperatures[1] || pressures[0] < pressures[1] || targets[0] < targets[1] {
            drops = [0.97 * drops[0], 1.03 * drops[1]];
        }
    }
    let pulsing = moments.iter().filter_map(|m| pulsation(&scenario.faults, m.time)).fold(0.0, f64::max);
    let swing = std::f64::consts::SQRT_2 * pulsing;
    drops = [drops[0] * (1.0 - swing), drops[1] * (1.0 + swing)];
    let truth = Truth::new(element, fluid, [drops, temperatures, pressures], moments.len())?;
    let happening = |m: &Moment| {
        let state = [m.temperature, m.pressure];
        let drop = match segment.drive {
            Drive::PressureDrop => m.drive,
            _ => truth.pressure_drop(target(m), state)?,
        };
        let mass_flow = match pulsation(&scenario.faults, m.time) {
            None => truth.mass_flow([drop, m.temperature, m.pressure])?,
            Some(rms) => {
                let phase = |i: usize| (std::f64::consts::TAU * i as f64 / PHASES as f64).sin();
                let at = |i: usize| drop * (1.0 + std::f64::consts::SQRT_2 * rms * phase(i));
                let flows: Result<Vec<f64>, Refused> =
                    (0..PHASES).map(|i| truth.mass_flow([at(i), m.temperature, m.pressure])).collect();
                flows?.iter().sum::<f64>() / PHASES as f64
            }
        };
        let reynolds = element.reynolds(mass_flow, Properties::at(fluid, m.temperature).viscosity(m.pressure));
        let rise = scenario.faults.iter().filter(|fault| fault.acts(m.time)).map(|fault| match fault.kind {
            Kind::Transition { from, rise } => rise * (reynolds - from).max(0.0) / 1000.0,
            _ => 0.0,
        });
        let drop = drop * (1.0 + rise.sum::<f64>());
        Ok(Happening { mass_flow, volume_flow: mass_flow / density(m.temperature, m.pressure), drop })
    };
    let happenings: Result<Vec<Happening>, Refused> = moments.iter().map(happening).collect();
    Ok((happenings?, truth.error))
}

fn pulsation(faults: &[Fault], time: f64) -> Option<f64> {
    faults.iter().find_map(|fault| match fault.kind {
        Kind::Pulsation(rms) if fault.acts(time) && rms > 0.0 => Some(rms),
        _ => None,
    })
}

/// The sensors with what they remember.
struct Readers<'a> {
    scenario: &'a Scenario,
    random: [Random; 5],
    odd: [Random; 5],
    felt: [Option<f64>; 5],
    last: [Option<f64>; 5],
}

impl<'a> Readers<'a> {
    fn new(scenario: &'a Scenario) -> Self {
        let of = |family: u64| std::array::from_fn(|i| Random::member(scenario.seed, family + i as u64));
        Self { scenario, random: of(1), odd: of(101), felt: [None; 5], last: [None; 5] }
    }

    fn row(&mut self, segment: &Segment, moment: &Moment, true_: &Happening, water: Option<f64>) -> Row {
        let faults = &self.scenario.faults;
        let acting: Vec<&Fault> = faults.iter().filter(|fault| fault.acts(moment.time)).collect();
        let swapped = acting.iter().any(|fault| fault.kind == Kind::SwappedPorts);
        let leak: f64 = acting.iter().map(|fault| if let Kind::Leak(flow) = fault.kind { flow } else { 0.0 }).sum();
        let humidity = water.map(|x| x * moment.pressure / water_vapour_pressure(moment.temperature));
        let truths = [
            Some(if swapped { -true_.drop } else { true_.drop }),
            Some(moment.temperature),
            Some(moment.pressure - if swapped { true_.drop } else { 0.0 }),
            humidity,
            Some(true_.volume_flow - leak),
        ];
        let readings = std::array::from_fn(|i| {
            let (sensor, value) = (self.scenario.sensors[i]?, truths[i]?);
            self.reading(i, sensor, value, moment.time, &acting)
        });
        Row {
            time: moment.time,
            fluid: segment.fluid.clone(),
            readings,
            volume_flow: true_.volume_flow,
            mass_flow: true_.mass_flow,
            faults: acting.iter().map(|fault| fault.name).collect(),
        }
    }

    fn reading(&mut self, i: usize, sensor: Sensor, value: f64, time: f64, acting: &[&Fault]) -> Option<f64> {
        let about = if Channel::ALL[i] == Channel::Temperature { 273.15 } else { 0.0 };
        let mut sensor = sensor;
        // Two deviates for each reading whatever acts, so that faults leave the rest of the file as it is.
        let (chance, sign) = (self.odd[i].unit(), if self.odd[i].unit() < 0.5 { -1.0 } else { 1.0 });
        let (mut spike, mut silent, mut stuck) = (0.0, false, false);
        for fault in acting.iter().filter(|fault| fault.channel == Some(Channel::ALL[i])) {
            match fault.kind {
                Kind::Noise(size) => sensor.noise = sensor.noise.hypot(size),
                Kind::Quantisation(size) => sensor.resolution = size,
                Kind::Gain(size) => sensor.gain += size,
                Kind::Zero(size) => sensor.zero += size,
                Kind::Drift(rate) => sensor.zero += rate * (time - fault.during[0]),
                Kind::Lag(size) => sensor.lag = size,
                Kind::Saturation(most) => sensor.range[1] = sensor.range[1].min(most),
                Kind::Stuck => stuck = true,
                Kind::Open => silent = true,
                Kind::Spikes(size, share) if chance < share => spike = sign * size,
                Kind::Dropouts(share) if chance < share => silent = true,
                _ => {}
            }
        }
        let step = self.scenario.interval;
        let read = sensor.read(value, about, [time, step], &mut self.felt[i], &mut self.random[i]) + spike;
        let shown = if stuck { self.last[i].unwrap_or(read) } else { read };
        self.last[i] = Some(shown);
        (!silent).then_some(shown)
    }
}

/// Rows as a readings file, the truth in `true_volume_flow_L_min` and `true_mass_flow_g_min`.
pub fn as_csv(simulated: &Simulated) -> String {
    const HEADERS: [&str; 5] =
        ["pressure_drop_Pa", "temperature_C", "line_pressure_kPa", "relative_humidity_pct", "reference_flow_L_min"];
    let shown = |i: usize, value: f64| match i {
        0 => format!("{value:.4}"),
        1 => format!("{:.4}", value - 273.15),
        2 => format!("{:.5}", value / 1e3),
        3 => format!("{:.3}", 100.0 * value),
        _ => format!("{:.7}", value * 60e3),
    };
    let there: Vec<usize> = (0..5).filter(|&i| simulated.columns[i]).collect();
    let mut text = String::from("time_s,fluid,");
    for &i in &there {
        text += HEADERS[i];
        text += ",";
    }
    text += "true_volume_flow_L_min,true_mass_flow_g_min,faults\n";
    for row in &simulated.rows {
        write!(text, "{:.3},{},", row.time, row.fluid).unwrap_or_default();
        for &i in &there {
            text += &row.readings[i].map_or_else(String::new, |value| shown(i, value));
            text += ",";
        }
        let (volume, mass) = (row.volume_flow * 60e3, row.mass_flow * 60e3);
        writeln!(text, "{volume:.9},{mass:.9},{}", row.faults.join(" ")).unwrap_or_default();
    }
    text
}
