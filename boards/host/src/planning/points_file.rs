//! A plan as a points file: what to set and its uncertainties are filled in, what is measured is left empty.

use crate::planning::bench::Bench;
use crate::planning::schedule::Plan;
use crate::planning::state::State;
use std::fmt::Write;

const COLUMNS: &str = "set_pressure_drop_Pa,expected_flow_L_min,fluid,pressure_drop_Pa,temperature_C,line_pressure_kPa,\
                       reference_flow_L_min,reference_temperature_C,reference_pressure_kPa,u_pressure_drop_Pa,\
                       u_temperature_K,u_line_pressure_Pa,u_reference_flow_pct,u_reference_flow_common_pct";

/// The points file to fill in, in the order of measuring.
pub fn skeleton(bench: &Bench<'_>, plan: &Plan) -> String {
    let State { temperature, line_pressure, .. } = bench.state;
    let mut text = format!(
        "# Plan for a calibration at {:.4} C and {} kPa: {} points in sweeps up and down in turn. Fill in the empty cells;\n\
         # a reference flow holds at its own temperature and pressure. Where sensors share an error between the points,\n\
         # add u_<quantity>_common_<unit>.\n{COLUMNS}\n",
        temperature - 273.15,
        clean(line_pressure / 1e3, 6),
        plan.points()
    );
    for drop in plan.sequence() {
        let [u_drop, u_t, u_p, _] = bench.uncertainties(drop).map(|u| clean(u, 4));
        let flow = plan.set_points.iter().find(|p| p.pressure_drop == drop).map_or(f64::NAN, |p| p.flow);
        // Writing to a string cannot fail.
        let _ = writeln!(
            text,
            "{drop},{},{},,,,,,,{u_drop},{u_t},{u_p},{},{}",
            clean(flow * 6e4, 6),
            bench.fluid.name(),
            clean(100.0 * bench.u_reference, 6),
            clean(100.0 * bench.u_reference_common, 6)
        );
    }
    text
}

/// A number to a few significant digits, without the digits that binary adds.
fn clean(value: f64, digits: usize) -> f64 {
    format!("{value:.*e}", digits.saturating_sub(1)).parse().unwrap_or(value)
}
