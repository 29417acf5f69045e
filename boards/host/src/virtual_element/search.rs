//! The flow that a pressure drop drives: a search on the march, coarse first.

use super::channel::Channel;
use super::grid::Grid;
use super::march::{Resolution, Station};
use super::refused::Refused;

/// Relative difference of the pressure drop at which the search ends.
const SETTLED: f64 = 1e-8;
/// Rounds of the coarse and of the fine search.
const ROUNDS: usize = 80;
/// Share of the line pressure above which a first guess is of no use.
const DEEPEST: f64 = 0.95;

/// A flow with the march that confirmed it.
#[derive(Debug, Clone)]
pub(crate) struct Found {
    /// Mass flow, kg/s.
    pub mass_flow: f64,
    /// The march of that flow, shifted by nothing: its own outlet pressure is within 1e-8 of the drop.
    pub stations: Vec<Station>,
}

/// Pressure drop of a march, Pa.
pub(crate) fn drop_of(channel: &Channel<'_>, stations: &[Station]) -> f64 {
    stations.last().map_or(0.0, |outlet| channel.pressure - outlet.pressure)
}

/// Finds the mass flow (kg/s) for a pressure drop (Pa, positive).
///
/// # Errors
/// No flow can be driven by it without vacuum, choking or leaving the fluid's table.
pub(crate) fn flow(channel: &Channel<'_>, drop: f64, fine: &Resolution) -> Result<Found, Refused> {
    if drop >= channel.pressure {
        return Err(Refused::Vacuum { pressure: channel.pressure - drop, position: 1.0 });
    }
    channel.substance.check(channel.wall_temperature, channel.pressure - drop)?;
    let start = creeping(channel, drop);
    let coarse = Grid::new(Resolution::COARSE.degree);
    let approach = secant(start, 1.0, drop, 1e-6, |m| channel.march(m, &coarse, &Resolution::COARSE), channel);
    // What the coarse march cannot do the fine one may, or it says why not.
    let (near, slope) = approach.unwrap_or((start, 1.0));
    let grid = Grid::new(fine.degree);
    let mut last = None;
    let (mass_flow, _) = secant(
        near,
        slope,
        drop,
        SETTLED,
        |m| {
            let stations = channel.march(m, &grid, fine)?;
            last = Some(stations.clone());
            Ok(stations)
        },
        channel,
    )?;
    let stations = last.unwrap_or_default();
    Ok(Found { mass_flow, stations })
}

/// Where the search starts: a slow flow of the mean density, whose pressure drop balances friction alone.
fn creeping(channel: &Channel<'_>, drop: f64) -> f64 {
    let mean = channel.pressure - 0.5 * drop.min(DEEPEST * channel.pressure);
    let reference = channel.substance.reference(channel.wall_temperature, mean);
    let state = channel.substance.state(channel.wall_temperature, mean, &reference);
    let section = channel.section;
    let across = section.hydraulic_diameter();
    let friction = 32.0 * state.viscosity * channel.length / (across * across * state.density);
    // Between the flow that friction and the one that a velocity head of 1.1 rho u^2 would let pass.
    let viscous = drop / friction;
    let head = (state.density * drop / 1.1).sqrt();
    section.area() / (1.0 / (viscous * viscous) + 1.0 / (head * head)).sqrt()
}

/// Secant search on ln mdot against ln dP, `slope` the first d ln dP/d ln mdot; a flow that cannot be driven counts as
/// too much. Returns the flow and the last slope.
fn secant(
    start: f64,
    slope: f64,
    drop: f64,
    settled: f64,
    mut march: impl FnMut(f64) -> Result<Vec<Station>, Refused>,
    channel: &Channel<'_>,
) -> Result<(f64, f64), Refused> {
    let (mut flow, mut slope) = (start, slope);
    let mut last: Option<(f64, f64)> = None; // ln mdot, ln(dP/drop)
    let (mut change, mut too_much) = (f64::NAN, f64::INFINITY);
    for _ in 0..ROUNDS {
        let miss = match march(flow) {
            Ok(stations) => (drop_of(channel, &stations) / drop).ln(),
            Err(refused @ Refused::NotSettled { .. }) if last.is_some() => return Err(refused),
            Err(refused) => {
                too_much = too_much.min(flow);
                let floor = last.map_or(0.0, |(x, _): (f64, f64)| x.exp());
                if too_much - floor < 1e-3 * too_much {
                    return Err(refused);
                }
                flow = if floor > 0.0 { 0.5 * (floor + too_much) } else { 0.5 * flow };
                continue;
            }
        };
        change = miss.abs();
        if change < settled {
            return Ok((flow, slope));
        }
        let x = flow.ln();
        if let Some((x0, miss0)) = last
            && (x - x0).abs() > 1e-9
        {
            slope = ((miss - miss0) / (x - x0)).clamp(0.3, 50.0);
        }
        last = Some((x, miss));
        flow = (x - miss / slope).exp();
        if flow >= too_much {
            flow = 0.5 * (x.exp() + too_much);
        }
    }
    Err(Refused::NotSettled { what: "the search for the flow", change })
}
