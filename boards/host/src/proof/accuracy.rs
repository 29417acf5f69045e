//! Errorless calibrations, used on other fluids, at other temperatures and pressures.

use super::rig::{Rig, point, shares};
use crate::parallel::each;
use evenbore::fluid::mineral_oil::{OilData, mineral_oil};
use evenbore::fluid::{StoredFluid, catalogue};
use evenbore::quantity::{AbsolutePressure, Density, KinematicViscosity, PressureDrop, Temperature};
use evenbore::{Reading, Record};
use std::fmt::Write;

/// State of the calibrations, K and Pa.
const BENCH: [f64; 2] = [293.15, 120e3];
/// Reynolds number above which a comparison is left out: the instrument flags it.
const LAMINAR: f64 = 1800.0;

/// How much is compared.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Extent {
    /// What a test run has time for.
    Few,
    /// Everything the table rests on.
    All,
}

/// A row of the table: what a calibrated element is used on.
#[derive(Debug, Clone, PartialEq)]
pub struct Row {
    /// Element.
    pub element: &'static str,
    /// What it was calibrated on.
    pub calibrated: &'static str,
    /// What it is used on.
    pub used: String,
    /// Comparisons.
    pub cases: usize,
    /// Largest relative error of the mass flow.
    pub worst: f64,
    /// Root mean square of the relative errors.
    pub rms: f64,
}

/// One use of a calibrated element.
struct Use<'a> {
    row: usize,
    fluid: &'a StoredFluid,
    state: [f64; 2],
    drop: f64,
}

/// An element, its calibration and its uses.
struct Programme<'a> {
    rig: Rig,
    fluid: &'a StoredFluid,
    calibrated: &'static str,
    /// Temperature (K) and pressure drop (Pa) of each point.
    points: Vec<[f64; 2]>,
    rows: Vec<String>,
    uses: Vec<Use<'a>>,
}

/// All rows. Every number of the table comes from here.
///
/// # Errors
/// A calibration or a true flow that could not be made, in words.
pub fn table(extent: Extent) -> Result<Vec<Row>, String> {
    let oil = workshop_oil();
    let mut programmes: Vec<Programme<'_>> = rigs().into_iter().map(|rig| gases(rig, extent)).collect();
    programmes.extend([water(extent), oil_programme(&oil, extent)]);
    programmes.iter().map(measured).collect::<Result<Vec<_>, _>>().map(|rows| rows.concat())
}

/// The elements for gases: a bundle, a bundle of short wide tubes, fine capillaries that take half the pressure, a slot.
fn rigs() -> [Rig; 4] {
    [
        Rig::tubes("tubes, L/D 200, to 5 kPa", 100, [0.5, 100.0], 5e3),
        Rig::tubes("tubes, L/D 133, to 2 kPa", 120, [0.6, 80.0], 2e3),
        Rig::plates("plates, gap 0.2 mm, L 60 mm, to 4 kPa", [0.2, 100.0, 60.0], 4e3),
        Rig::tubes("capillaries, L/D 500, to 45 kPa", 4, [0.2, 100.0], 45e3),
    ]
}

fn gases(rig: Rig, extent: Extent) -> Programme<'static> {
    let few = extent == Extent::Few;
    let of = |entries: &[(&'static str, &'static StoredFluid)]| entries.to_vec();
    let all = of(&[
        ("nitrogen", catalogue::NITROGEN.fluid()),
        ("air", catalogue::AIR.fluid()),
        ("helium", catalogue::HELIUM.fluid()),
        ("carbon dioxide", catalogue::CARBON_DIOXIDE.fluid()),
        ("argon", catalogue::ARGON.fluid()),
    ]);
    let temperatures: &[f64] = if few { &[273.15, 333.15] } else { &[273.15, 293.15, 313.15, 333.15] };
    // A drop of 45 kPa leaves nothing sensible of 80 kPa: the fine capillaries start at 90.
    let lowest = if rig.full_scale > 0.2 * 80e3 { 90e3 } else { 80e3 };
    let pressures: &[f64] = if few { &[lowest, 300e3] } else { &[lowest, 120e3, 300e3] };
    let at: &[f64] = if few { &[0.1, 1.0] } else { &[0.01, 0.03, 0.1, 0.3, 1.0] };
    let mut uses = Vec::new();
    for (row, (_, fluid)) in all.iter().enumerate() {
        for &t in temperatures {
            for &p in pressures {
                uses.extend(at.iter().map(|share| Use { row, fluid, state: [t, p], drop: share * rig.full_scale }));
            }
        }
    }
    let drops = shares(12, 0.03).into_iter().map(|share| [BENCH[0], share * rig.full_scale]).collect();
    let rows = all.iter().map(|(name, _)| (*name).to_owned()).collect();
    let fluid = catalogue::NITROGEN.fluid();
    Programme { rig, fluid, calibrated: "nitrogen, 20 C, 120 kPa", points: drops, rows, uses }
}

fn water(extent: Extent) -> Programme<'static> {
    let rig = Rig::tubes("tubes, bore 0.5 mm, L 150 mm", 40, [0.5, 150.0], 15e3);
    let temperatures: &[f64] =
        if extent == Extent::Few { &[278.15, 333.15] } else { &[278.15, 288.15, 303.15, 318.15, 333.15] };
    liquid(rig, catalogue::WATER.fluid(), "water, 5 to 60 C", "water, 20 C", temperatures, extent)
}

/// Oil: the cold runs leave B open, so three points are taken hot.
fn oil_programme(oil: &StoredFluid, extent: Extent) -> Programme<'_> {
    let rig = Rig::tubes("tubes, bore 1 mm, L 200 mm", 20, [1.0, 200.0], 60e3);
    let temperatures: &[f64] =
        if extent == Extent::Few { &[283.15, 353.15] } else { &[283.15, 298.15, 313.15, 333.15, 353.15] };
    let mut programme = liquid(rig, oil, "ISO VG 32 oil, 10 to 80 C", "the oil, 20 C and 80 C", temperatures, extent);
    programme.points.extend([0.3, 0.6, 1.0].map(|share| [353.15, share * programme.rig.full_scale]));
    programme
}

fn liquid<'a>(
    rig: Rig,
    fluid: &'a StoredFluid,
    used: &str,
    calibrated: &'static str,
    temperatures: &[f64],
    extent: Extent,
) -> Programme<'a> {
    let at: &[f64] = if extent == Extent::Few { &[0.01, 1.0] } else { &[0.001, 0.01, 0.03, 0.1, 0.3, 1.0] };
    let each = |t: f64| at.iter().map(move |share| (t, share));
    let uses = temperatures.iter().flat_map(|&t| each(t));
    let uses = uses.map(|(t, share)| Use { row: 0, fluid, state: [t, 200e3], drop: share * rig.full_scale }).collect();
    let points = shares(12, 0.01).into_iter().map(|share| [BENCH[0], share * rig.full_scale]).collect();
    Programme { rig, fluid, calibrated, points, rows: vec![used.into()], uses }
}

/// Calibrates, uses, and gathers the errors row by row.
fn measured(programme: &Programme<'_>) -> Result<Vec<Row>, String> {
    let Programme { rig, fluid, .. } = programme;
    let point_at = |i: usize| {
        let [t, drop] = programme.points[i];
        let state = [t, BENCH[1]];
        rig.flow(fluid, state, drop).map(|[mass, _]| point(i as u64 + 2, drop, state, mass))
    };
    let points: Result<Vec<_>, _> = each(programme.points.len(), point_at).into_iter().collect();
    let points = points.map_err(|refused| format!("{}: {refused}", rig.name))?;
    let verdict = rig.calibrated(fluid, points, &[]).map_err(|problem| problem.to_string())?;
    let record = verdict.record.ok_or("no record")?;
    let errors = each(programme.uses.len(), |i| error(rig, &record, &programme.uses[i]));
    let errors: Vec<Option<f64>> =
        errors.into_iter().collect::<Result<_, _>>().map_err(|why| format!("{}: {why}", rig.name))?;
    let row = |(index, used): (usize, &String)| {
        let of_row = errors.iter().zip(&programme.uses).filter(|(_, case)| case.row == index);
        let found: Vec<f64> = of_row.filter_map(|(error, _)| *error).collect();
        Row {
            element: rig.name,
            calibrated: programme.calibrated,
            used: used.clone(),
            cases: found.len(),
            worst: found.iter().fold(0.0, |worst, e| if e.abs() > f64::abs(worst) { *e } else { worst }),
            rms: (found.iter().map(|e| e * e).sum::<f64>() / found.len().max(1) as f64).sqrt(),
        }
    };
    Ok(programme.rows.iter().enumerate().map(row).collect())
}

/// Relative error of the instrument's mass flow; none where the flow is not laminar.
fn error(rig: &Rig, record: &Record, case: &Use<'_>) -> Result<Option<f64>, String> {
    let [t, p] = case.state;
    let drop = case.drop as f32;
    let reading = Reading::new(
        PressureDrop::from_pascals(drop),
        Temperature::from_kelvin(t as f32),
        AbsolutePressure::from_pascals(p as f32),
    );
    let meter = record.meter().and_then(|meter| meter.with_fluid(case.fluid)).map_err(|error| error.to_string())?;
    let flow = meter.flow(&reading).map_err(|refusal| refusal.to_string())?;
    if f64::from(flow.reynolds) > LAMINAR {
        return Ok(None);
    }
    let [mass, _] = rig
        .flow(case.fluid, [f64::from(t as f32), p], f64::from(drop))
        .map_err(|refused| format!("{} at {t} K, {p} Pa, {drop} Pa: {refused}", case.fluid.name()))?;
    Ok(Some(f64::from(flow.mass.as_kilograms_per_second()) / mass - 1.0))
}

/// An ISO VG 32 oil of our own.
pub fn workshop_oil() -> StoredFluid {
    let at = |c, nu| (Temperature::from_celsius(c), KinematicViscosity::from_square_millimetres_per_second(nu));
    mineral_oil(&OilData {
        name: "workshop-oil",
        viscosities: [at(40.0, 32.0), at(100.0, 5.4)],
        density: (Temperature::from_celsius(15.0), Density::from_kilograms_per_cubic_metre(870.0)),
        expansion_per_kelvin: 7.3e-4,
        u_viscosity: 0.005,
    })
    .expect("a sensible oil")
}

/// The rows as a Markdown table.
pub fn markdown(rows: &[Row]) -> String {
    let mut text =
        String::from("| element | calibrated on | used on | cases | worst | rms |\n|---|---|---|---|---|---|\n");
    for row in rows {
        writeln!(
            text,
            "| {} | {} | {} | {} | {:+.3} % | {:.3} % |",
            row.element,
            row.calibrated,
            row.used,
            row.cases,
            100.0 * row.worst,
            100.0 * row.rms
        )
        .unwrap_or_default();
    }
    text
}
