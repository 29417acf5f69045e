//! The scenario file: an element, its sensors, what flows through it, and what goes wrong.
//!
//! ```toml
//! element = "element.toml"          # or a table [element] with the keys of an element file
//! seed = 1
//! interval_s = 10.0
//! [bundle]                          # as made; absent: as drawn
//! bore_factor = 1.006
//! bore_spread_rel = 0.01
//! [sensors.pressure_drop]           # temperature, line_pressure, relative_humidity, reference_flow likewise
//! noise_Pa = 0.2                    # zero_, zero_drift_..._per_h, resolution_; gain_rel, noise_rel, lag_s, range_Pa
//! [[segment]]                       # a number holds, a pair goes from one to the other; what is absent stays
//! duration_s = 600.0
//! fluid = "nitrogen"
//! pressure_drop_Pa = [50.0, 2500.0] # or flow_L_min, mass_flow_g_min
//! temperature_C = 20.0
//! line_pressure_kPa = 120.0
//! [[fault]]
//! kind = "stuck"
//! sensor = "temperature"
//! from_s = 100.0
//! ```

use super::fault::{Channel, Fault, KINDS, Kind};
use super::sensor::Sensor;
use crate::input::element_file::ElementFile;
use crate::input::problem::Problem;
use crate::input::toml_table::{Limits, Section};
use crate::input::toml_text::TomlText;
use std::path::{Path, PathBuf};

/// Most readings of a scenario.
const MOST_READINGS: f64 = 1e6;
const SEED: Limits = Limits::new(0.0, 9e15, "");
const INTERVAL: Limits = Limits::new(1e-3, 86_400.0, "s");
const DURATION: Limits = Limits::new(1e-3, 1e7, "s");
const MOMENT: Limits = Limits::new(0.0, 1e9, "s");
const FACTOR: Limits = Limits::new(0.5, 2.0, "");
const SPREAD: Limits = Limits::new(0.0, 0.2, "");
const SIZE: Limits = Limits::new(-1e9, 1e9, "");
const AMOUNT: Limits = Limits::new(0.0, 1e9, "");
const SHARE: Limits = Limits::new(0.0, 100.0, "pct");
const RMS: Limits = Limits::new(0.0, 0.6, "");
const REYNOLDS: Limits = Limits::new(1.0, 1e5, "");
const DROP: Limits = Limits::new(0.0, 1e7, "Pa");
const FLOW: Limits = Limits::new(0.0, 1e6, "");
// Wide: what lies outside the possible is refused with its physical reason.
const TEMPERATURE: Limits = Limits::new(-1000.0, 1000.0, "C");
const PRESSURE: Limits = Limits::new(-1e5, 1e5, "kPa");
const HUMIDITY: Limits = Limits::new(0.0, 100.0, "pct");

/// What sets the flow of a segment.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Drive {
    /// A pressure drop, Pa.
    PressureDrop,
    /// A volume flow at the inlet, m3/s.
    VolumeFlow,
    /// A mass flow, kg/s.
    MassFlow,
}

/// A stretch of time; pairs go from their first to their second value.
#[derive(Debug, Clone, PartialEq)]
pub struct Segment {
    /// Line of the file.
    pub line: Option<u64>,
    /// s.
    pub duration: f64,
    /// Name of the fluid.
    pub fluid: String,
    /// What sets the flow.
    pub drive: Drive,
    /// Its values in SI.
    pub way: [f64; 2],
    /// K.
    pub temperature: [f64; 2],
    /// Pa, at the port marked upstream.
    pub line_pressure: [f64; 2],
    /// Of the air at the start of the segment, 0 to 1; the amount of water stays.
    pub relative_humidity: Option<f64>,
}

/// A scenario.
#[derive(Debug, Clone)]
pub struct Scenario {
    /// Path as the user gave it.
    pub file: String,
    /// The element as drawn.
    pub element: ElementFile,
    /// Bores as made over those drawn, and their relative spread.
    pub bundle: [f64; 2],
    /// Fluids of the user's own.
    pub fluids: Option<PathBuf>,
    /// Of all noise.
    pub seed: u64,
    /// Between readings, s.
    pub interval: f64,
    /// In the order of [`Channel::ALL`]; a humidity or reference without a table is not there.
    pub sensors: [Option<Sensor>; 5],
    /// In the order of the file, at least one.
    pub segments: Vec<Segment>,
    /// In the order of the file.
    pub faults: Vec<Fault>,
}

impl Scenario {
    /// Reads a scenario; files it names are sought beside it.
    ///
    /// * `path`: of the file, `-` for standard input
    ///
    /// # Errors
    /// Names the line and key of what is missing, unknown or outside its range.
    pub fn open(path: &Path) -> Result<Self, Problem> {
        Self::read(&TomlText::open(path)?, path.parent().unwrap_or(Path::new("")))
    }

    /// Reads a scenario from a text.
    ///
    /// * `text`: TOML
    /// * `folder`: where the files it names are sought
    ///
    /// # Errors
    /// As [`Self::open`].
    pub fn read(text: &TomlText, folder: &Path) -> Result<Self, Problem> {
        let mut top = Section::top(text)?;
        top.accept(&["element", "fluids", "seed", "interval_s", "bundle", "sensors", "segment", "fault"])?;
        let nothing = top.absent("segment", "one or more tables [[segment]]");
        let file = nothing.file.clone();
        let fluids = if top.has("fluids") { Some(folder.join(top.text("fluids")?)) } else { None };
        let seed = top.optional_number("seed", SEED)?.unwrap_or(1.0) as u64;
        let interval = top.number("interval_s", INTERVAL)?;
        let element = element(&mut top, folder)?;
        let bundle = top.take("bundle")?.map_or(Ok([1.0, 0.0]), |keys| bundle(&keys))?;
        let sensors = sensors(top.take("sensors")?)?;
        let mut segments: Vec<Segment> = Vec::new();
        for keys in top.take_each("segment")? {
            segments.push(segment(&keys, segments.last())?);
        }
        let readings = segments.iter().map(|segment| segment.duration / interval).sum::<f64>();
        if segments.is_empty() {
            return Err(nothing);
        }
        if readings > MOST_READINGS {
            let message = format!("the segments hold {readings:.0} readings, at most {MOST_READINGS} are made");
            return Err(Problem::new(file, message));
        }
        let mut faults = Vec::new();
        for keys in top.take_each("fault")? {
            faults.push(fault(&keys, &sensors)?);
        }
        Ok(Self { file, element, bundle, fluids, seed, interval, sensors, segments, faults })
    }
}

fn element(top: &mut Section<'_>, folder: &Path) -> Result<ElementFile, Problem> {
    if !top.has("element") {
        return Err(top.absent("element", "the path of an element file, or a table [element]"));
    }
    if let Ok(Some(keys)) = top.take("element") {
        return ElementFile::from_keys(&keys);
    }
    ElementFile::open(folder.join(top.text("element")?))
}

fn bundle(keys: &Section<'_>) -> Result<[f64; 2], Problem> {
    keys.accept(&["bore_factor", "bore_spread_rel"])?;
    let factor = keys.optional_number("bore_factor", FACTOR)?.unwrap_or(1.0);
    Ok([factor, keys.optional_number("bore_spread_rel", SPREAD)?.unwrap_or(0.0)])
}

fn sensors(keys: Option<Section<'_>>) -> Result<[Option<Sensor>; 5], Problem> {
    let mut sensors = [Some(Sensor::EXACT), Some(Sensor::EXACT), Some(Sensor::EXACT), None, None];
    let Some(mut keys) = keys else { return Ok(sensors) };
    keys.accept(&Channel::NAMES)?;
    for (i, name) in Channel::NAMES.iter().enumerate() {
        if let Some(keys) = keys.take(name)? {
            sensors[i] = Some(sensor(&keys, i)?);
        }
    }
    Ok(sensors)
}

fn sensor(keys: &Section<'_>, i: usize) -> Result<Sensor, Problem> {
    let (unit, factor) = (Channel::UNITS[i], Channel::FACTORS[i]);
    // A range is in the unit of the values, which for a temperature is not that of its errors.
    let (range_unit, shift) = if Channel::ALL[i] == Channel::Temperature { ("C", 273.15) } else { (unit, 0.0) };
    let [noise, resolution, zero, drift, range] = [
        format!("noise_{unit}"),
        format!("resolution_{unit}"),
        format!("zero_{unit}"),
        format!("zero_drift_{unit}_per_h"),
        format!("range_{range_unit}"),
    ];
    keys.accept(&[&noise, &resolution, &zero, &drift, &range, "gain_rel", "noise_rel", "lag_s"])?;
    let of = |key: &str, limits| keys.optional_number(key, limits).map(|value| value.unwrap_or(0.0));
    let ends = keys.optional_way(&range, SIZE)?.map(|ends| ends.map(|end| end * factor + shift));
    Ok(Sensor {
        lag: of("lag_s", AMOUNT)?,
        gain: of("gain_rel", SIZE)?,
        zero: of(&zero, SIZE)? * factor,
        drift: of(&drift, SIZE)? * factor / 3600.0,
        noise: of(&noise, AMOUNT)? * factor,
        noise_rel: of("noise_rel", AMOUNT)?,
        resolution: of(&resolution, AMOUNT)? * factor,
        range: match ends {
            Some([low, high]) if low >= high => {
                return Err(keys.problem(&range, "a lower and a higher end were expected, such as [0.0, 2500.0]"));
            }
            Some(ends) => ends,
            None => Sensor::EXACT.range,
        },
    })
}

fn segment(keys: &Section<'_>, before: Option<&Segment>) -> Result<Segment, Problem> {
    const DRIVES: [(&str, Drive, f64, Limits); 3] = [
        ("pressure_drop_Pa", Drive::PressureDrop, 1.0, DROP),
        ("flow_L_min", Drive::VolumeFlow, 1.0 / 60e3, FLOW),
        ("mass_flow_g_min", Drive::MassFlow, 1.0 / 60e3, FLOW),
    ];
    keys.accept(&[
        "duration_s",
        "fluid",
        DRIVES[0].0,
        DRIVES[1].0,
        DRIVES[2].0,
        "temperature_C",
        "line_pressure_kPa",
        "relative_humidity_pct",
    ])?;
    let mut driven = None;
    for (key, drive, factor, limits) in DRIVES {
        if let Some(way) = keys.optional_way(key, limits)? {
            if driven.is_some() {
                return Err(keys.problem(key, "the flow is already set by another key of this segment"));
            }
            driven = Some((drive, way.map(|value| value * factor)));
        }
    }
    let last = |way: [f64; 2]| [way[1]; 2];
    let driven = driven.or(before.map(|before| (before.drive, last(before.way))));
    let (drive, way) =
        driven.ok_or_else(|| keys.absent("pressure_drop_Pa", "pressure_drop_Pa, flow_L_min or mass_flow_g_min"))?;
    let temperature = keys.optional_way("temperature_C", TEMPERATURE)?.map(|way| way.map(|celsius| celsius + 273.15));
    let temperature = temperature.or(before.map(|before| last(before.temperature)));
    let pressure = keys.optional_way("line_pressure_kPa", PRESSURE)?.map(|way| way.map(|kpa| kpa * 1e3));
    let pressure = pressure.or(before.map(|before| last(before.line_pressure)));
    let fluid = match before {
        Some(before) if !keys.has("fluid") => before.fluid.clone(),
        _ => keys.text("fluid")?.to_owned(),
    };
    let humidity = keys.optional_number("relative_humidity_pct", HUMIDITY)?.map(|percent| percent / 100.0);
    if humidity.is_some() && fluid != "air" {
        return Err(keys.problem("relative_humidity_pct", format!("humidity belongs to air, the fluid is {fluid}")));
    }
    Ok(Segment {
        line: keys.problem("", "").line,
        duration: keys.number("duration_s", DURATION)?,
        drive,
        way,
        temperature: temperature.ok_or_else(|| keys.absent("temperature_C", "a temperature"))?,
        line_pressure: pressure.ok_or_else(|| keys.absent("line_pressure_kPa", "an absolute pressure"))?,
        relative_humidity: humidity.or(before.filter(|_| fluid == "air").and_then(|before| before.relative_humidity)),
        fluid,
    })
}

fn fault(keys: &Section<'_>, sensors: &[Option<Sensor>; 5]) -> Result<Fault, Problem> {
    let kind = keys.choice("kind", &KINDS)?;
    let of_flow = kind >= 11;
    let channel = if of_flow { None } else { Some(keys.choice("sensor", &Channel::NAMES)?) };
    let (unit, factor) = channel.map_or(("", 1.0), |i| (Channel::UNITS[i], Channel::FACTORS[i]));
    let sized = match KINDS[kind] {
        "saturation" if unit == "K" => "size_C".to_owned(),
        "noise" | "quantisation" | "zero" | "saturation" | "spikes" => format!("size_{unit}"),
        "drift" => format!("size_{unit}_per_h"),
        "lag" => "size_s".into(),
        "leak" => "size_L_min".into(),
        _ => "size_rel".into(),
    };
    let size = || keys.number(&sized, SIZE);
    let share = || keys.number("share_pct", SHARE).map(|percent| percent / 100.0);
    let mut accepted = vec!["kind", "from_s", "to_s"];
    accepted.extend(if of_flow { None } else { Some("sensor") });
    let (kind_found, further): (Kind, Vec<&str>) = match KINDS[kind] {
        "noise" => (Kind::Noise(size()?.abs() * factor), vec![&sized]),
        "quantisation" => (Kind::Quantisation(size()?.abs() * factor), vec![&sized]),
        "gain" => (Kind::Gain(size()?), vec![&sized]),
        "zero" => (Kind::Zero(size()? * factor), vec![&sized]),
        "drift" => (Kind::Drift(size()? * factor / 3600.0), vec![&sized]),
        "lag" => (Kind::Lag(size()?.abs()), vec![&sized]),
        "saturation" if unit == "K" => (Kind::Saturation(size()? + 273.15), vec![&sized]),
        "saturation" => (Kind::Saturation(size()? * factor), vec![&sized]),
        "stuck" => (Kind::Stuck, vec![]),
        "open" => (Kind::Open, vec![]),
        "spikes" => (Kind::Spikes(size()? * factor, share()?), vec![&sized, "share_pct"]),
        "dropouts" => (Kind::Dropouts(share()?), vec!["share_pct"]),
        "swapped-ports" => (Kind::SwappedPorts, vec![]),
        "leak" => (Kind::Leak(keys.number(&sized, AMOUNT)? / 60e3), vec![&sized]),
        "pulsation" => (Kind::Pulsation(keys.number(&sized, RMS)?), vec![&sized]),
        "wrong-gas" => (Kind::WrongGas(keys.text("fluid")?.to_owned()), vec!["fluid"]),
        _ => {
            let transition = Kind::Transition { from: keys.number("from_reynolds", REYNOLDS)?, rise: size()? };
            (transition, vec![&sized, "from_reynolds"])
        }
    };
    accepted.extend(further);
    keys.accept(&accepted)?;
    if let Some(i) = channel.filter(|&i| sensors[i].is_none()) {
        return Err(keys.problem("sensor", format!("the scenario has no table [sensors.{}]", Channel::NAMES[i])));
    }
    if KINDS[kind] == "leak" && sensors[4].is_none() {
        return Err(
            keys.problem("kind", "a leak shows against a reference: a table [sensors.reference_flow] is missing")
        );
    }
    let from = keys.optional_number("from_s", MOMENT)?.unwrap_or(0.0);
    let to = keys.optional_number("to_s", MOMENT)?.unwrap_or(f64::INFINITY);
    Ok(Fault { name: KINDS[kind], kind: kind_found, channel: channel.map(|i| Channel::ALL[i]), during: [from, to] })
}
