//! Viscosity over the temperatures of a stored table: dynamic beside kinematic, each with its uncertainty.

use crate::report::axis::Axis;
use crate::report::figure::{Anchor, Figure, Frame, Rendition};
use crate::report::key::{Key, Sign};
use crate::report::numbers;
use evenbore::double::Properties;
use evenbore::fluid::StoredFluid;
use evenbore::quantity::Temperature;

/// Steps along the curve.
const STEPS: usize = 96;
const HEIGHT: f64 = 320.0;
/// Ratio of largest to smallest value above which the axis is logarithmic.
const WIDE: f64 = 6.0;
/// Share of the axis below which a band is hidden by the line.
const VISIBLE: f64 = 0.01;

/// Style of a drawing that stands alone.
const STYLE: &str = "\
text { font: 12px 'Segoe UI', 'Helvetica Neue', Arial, 'Liberation Sans', sans-serif; fill: #1c2126; }
.tick { fill: #4b545d; } .sup, .sub { font-size: 9px; }
.grid { stroke: #e6e9ec; } .minor { stroke: #f2f4f5; } .axis { stroke: #4b545d; }
.fitted { fill: none; stroke: #14506e; stroke-width: 2; }
.band-fit { fill: #a9c4d2; }
.note { fill: #1c2126; }
";

/// A panel: where it starts, its title, and the value at a temperature.
struct Panel<'a> {
    left: f64,
    title: &'a str,
    values: Vec<(f64, f64)>,
    logarithmic: bool,
}

/// Draws the fluid's viscosity at an absolute pressure (Pa), as an SVG file.
///
/// ```
/// use evenbore::fluid::catalogue::NITROGEN;
/// let svg = evenbore_bench::planning::fluid_plot::draw(NITROGEN.fluid(), 101_325.0);
/// assert!(svg.starts_with("<svg xmlns=") && svg.contains("kinematic viscosity"));
/// ```
pub fn draw(fluid: &StoredFluid, pressure: f64) -> String {
    let title = format!("Viscosity of {} at {} kPa", fluid.name(), pressure / 1e3);
    let about = "Dynamic and kinematic viscosity over temperature, with the expanded uncertainty of the stored values.";
    let mut figure = Figure::new("viscosity", Rendition::Wide, HEIGHT, &title, about);
    let u = f64::from(fluid.u_viscosity());
    let mut band = format!("expanded uncertainty, ±{} %", numbers::percent(2.0 * u));
    let at = |of: fn(&Properties, f64) -> f64| sampled(fluid, |t| of(&Properties::at(fluid, t), pressure));
    let dynamic = at(|properties, p| properties.viscosity(p) * 1e6);
    let kinematic = at(|properties, p| properties.viscosity(p) / properties.density(p) * 1e6);
    let (low, high) = limits(&dynamic);
    if 4.0 * u * high < VISIBLE * (high - low) {
        band += ", thinner than the line";
    }
    let name = format!("{} at {} kPa absolute", fluid.name(), numbers::significant(pressure / 1e3, 6));
    let key = Key::new(vec![(Sign::Line("fitted"), &name), (Sign::Area("band-fit"), &band)], Rendition::Wide.width());
    key.draw(&mut figure);
    let (milli, logarithmic) = (high > 1e3, low > 0.0 && high / low > WIDE);
    let dynamic = if milli { dynamic.into_iter().map(|(t, v)| (t, v / 1e3)).collect() } else { dynamic };
    let title = if milli { "dynamic viscosity, mPa s" } else { "dynamic viscosity, μPa s" };
    panel(&mut figure, key.height(), u, &Panel { left: 48.0, title, values: dynamic, logarithmic });
    let title = "kinematic viscosity, mm^{2}/s";
    panel(&mut figure, key.height(), u, &Panel { left: 418.0, title, values: kinematic, logarithmic });
    figure.finish_alone(STYLE)
}

/// Temperature (C) and value over the table's range.
fn sampled(fluid: &StoredFluid, value: impl Fn(f64) -> f64) -> Vec<(f64, f64)> {
    let [low, high] = fluid.temperature_range().map(Temperature::as_kelvin).map(f64::from);
    let at = |i: usize| low + (high - low) * i as f64 / STEPS as f64;
    (0..=STEPS).map(at).map(|t| (t - 273.15, value(t))).collect()
}

/// Smallest and largest value.
fn limits(values: &[(f64, f64)]) -> (f64, f64) {
    values.iter().fold((f64::INFINITY, 0.0), |(low, high), (_, v)| (low.min(*v), high.max(*v)))
}

fn panel(figure: &mut Figure, key: f64, u: f64, panel: &Panel<'_>) {
    let (low, high) = limits(&panel.values);
    let (Some((from, _)), Some((to, _))) = (panel.values.first(), panel.values.last()) else { return };
    let (low, high) = (low * (1.0 - 2.0 * u), high * (1.0 + 2.0 * u));
    let margin = 0.05 * (high - low);
    let y = if panel.logarithmic {
        Axis::logarithmic(low / 1.15, high * 1.15)
    } else {
        Axis::linear(low - margin, high + margin, 6)
    };
    let frame = Frame {
        left: panel.left,
        top: key + 40.0,
        right: panel.left + 290.0,
        bottom: HEIGHT - 46.0,
        x: Axis::linear(*from, *to, 5),
        y,
    };
    // Titles of both panels stand over their own axes.
    frame.draw(figure, "temperature, °C", "");
    figure.text((panel.left - 40.0, frame.top - 14.0), Anchor::Start, "title", panel.title);
    let edge = |factor: f64| panel.values.iter().map(move |(t, v)| (*t, v * factor)).collect::<Vec<_>>();
    let upper = edge(1.0 + 2.0 * u).into_iter();
    let outline: Vec<(f64, f64)> =
        upper.chain(edge(1.0 - 2.0 * u).into_iter().rev()).map(|(t, v)| frame.at(t, v)).collect();
    figure.path(&outline, true, "band-fit");
    let line: Vec<(f64, f64)> = panel.values.iter().map(|(t, v)| frame.at(*t, *v)).collect();
    figure.path(&line, false, "fitted");
}
