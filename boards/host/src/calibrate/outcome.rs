//! What a calibration found: the content of `calibration.json`, and all that the report shows.

use serde::{Deserialize, Serialize};

/// The result of one calibration run. SI units; `a` in 1/m3, `b` in 1/m4 (see DEVELOPERS.md, "Calibration").
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Calibration {
    /// Serial number of the element.
    pub serial: String,
    /// Name of the fluid of the run.
    pub fluid: String,
    /// File the points came from, as named on the command line.
    pub points_file: String,
    /// Date of the calibration, ISO 8601 (YYYY-MM-DD).
    pub date: String,
    /// Number of points in the file.
    pub points: usize,
    /// Number of points the fit used.
    pub points_used: usize,
    /// Viscous coefficient A of `rho dP / (mu mdot) = A + B mdot/mu`, at the reference temperature, 1/m3.
    pub a: f64,
    /// Kinetic coefficient B, 1/m4.
    pub b: f64,
    /// Standard uncertainty of `a`, all parts.
    pub u_a: f64,
    /// Standard uncertainty of `b`, all parts.
    pub u_b: f64,
    /// Correlation of `a` and `b`, all parts.
    pub correlation_ab: f64,
    /// Standard uncertainty of `a` from the fit alone (type A).
    pub u_a_fit: f64,
    /// Standard uncertainty of `b` from the fit alone (type A).
    pub u_b_fit: f64,
    /// Correlation of `a` and `b` from the fit alone.
    pub correlation_ab_fit: f64,
    /// Parts shared by all points; they do not average away. `pressure-drop-zero` is part of the fit's own uncertainty
    /// (`u_a_fit`, `u_b_fit`) as well, the others are not.
    pub common: Vec<CommonEffect>,
    /// Whether `b` rests on the geometry rather than on the data.
    pub b_from_prior: bool,
    /// Weighted sum of squared residuals.
    pub chi_squared: f64,
    /// Degrees of freedom of the fit.
    pub degrees_of_freedom: f64,
    /// Probability of a chi-squared at least as large by chance.
    pub p_value: f64,
    /// `stated` when the points' uncertainties were given, `residuals` when the scale came from the scatter.
    pub uncertainty_basis: String,
    /// Whether the run may be used.
    pub accepted: bool,
    /// The reason given for using a refused run, when it was overridden.
    pub accepted_anyway: Option<String>,
    /// What was found, worst first.
    pub findings: Vec<Finding>,
    /// Fitted coefficients against the nominal geometry.
    pub geometry: GeometryRatio,
    /// Range over which the calibration holds.
    pub range: Range,
    /// State at which the uncertainties hold.
    pub state: MeanState,
    /// Uncertainty over the range, small flow to large.
    pub uncertainty: Vec<UncertaintyRow>,
    /// A row per point.
    pub residuals: Vec<ResidualRow>,
    /// Budget at full scale and at a tenth of it.
    pub budget: Vec<BudgetRow>,
}

/// A named common part and its effect on the coefficients.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct CommonEffect {
    /// What is shared: `reference-flow`, `viscosity`, `pressure-drop`, `density`, `temperature`, `moisture`,
    /// `pressure-drop-zero`.
    pub name: String,
    /// Relative standard uncertainty of the cause (kelvin for temperature, pascal for a zero).
    pub u: f64,
    /// Unit of `u`: `rel`, `K` or `Pa`.
    pub unit: String,
    /// Change of `a` for one standard uncertainty, 1/m3.
    pub effect_a: f64,
    /// Change of `b` for one standard uncertainty, 1/m4.
    pub effect_b: f64,
}

/// One thing found in the run.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Finding {
    /// `outlier`, `not-laminar`, `zero-offset`, `fluid-mismatch`, `lack-of-fit`, `b-from-prior`,
    /// `stated-uncertainty-too-large` or `too-few-points`.
    pub kind: String,
    /// Line numbers in the points file.
    pub points: Vec<u64>,
    /// One sentence for a person.
    pub message: String,
    /// Whether this finding refuses the run.
    pub refuses: bool,
}

/// Fitted coefficients divided by those of the nominal geometry; absent for shape `other`.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct GeometryRatio {
    /// Fitted over nominal `a`.
    pub a_ratio: Option<f64>,
    /// Fitted over nominal `b`.
    pub b_ratio: Option<f64>,
}

/// Range of validity in `x = mdot/mu`, metres, and what it means on the run's fluid.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Range {
    /// Smallest calibrated x, m.
    pub x_min: f64,
    /// Largest calibrated x, m.
    pub x_max: f64,
    /// Largest Reynolds number of the run (absent when the bore is unknown).
    pub reynolds_max: Option<f64>,
    /// Largest pressure drop of the run, Pa.
    pub pressure_drop_max: f64,
}

/// Means of the points used.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct MeanState {
    /// Element temperature, K.
    pub temperature: f64,
    /// Absolute line pressure, Pa.
    pub line_pressure: f64,
    /// Relative humidity, 0 to 1; absent when no point states one.
    pub relative_humidity: Option<f64>,
}

/// Relative uncertainty of volume flow at one flow, with the sensors of the record.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct UncertaintyRow {
    /// Volume flow at the run's mean inlet conditions, m3/s.
    pub flow: f64,
    /// Pressure drop there, Pa.
    pub pressure_drop: f64,
    /// Standard uncertainty from the fit, relative.
    pub type_a: f64,
    /// Standard uncertainty from common reference and fluid data, relative.
    pub common: f64,
    /// Standard uncertainty from the sensors at use, relative.
    pub sensors: f64,
    /// Expanded uncertainty, relative.
    pub expanded: f64,
    /// Coverage factor of `expanded`, for 95.45 %.
    pub coverage_factor: f64,
}

/// One point against the fit.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct ResidualRow {
    /// Line in the points file.
    pub line: u64,
    /// Pressure drop, Pa.
    pub pressure_drop: f64,
    /// Element temperature, K.
    pub temperature: f64,
    /// Absolute line pressure, Pa.
    pub line_pressure: f64,
    /// Reference volume flow at the element's inlet, m3/s.
    pub reference_flow: f64,
    /// Reynolds number (absent when the bore is unknown).
    pub reynolds: Option<f64>,
    /// x = mdot/mu, m.
    pub x: f64,
    /// y = rho dP/(mu mdot), reduced to the reference temperature and to no slip, 1/m3.
    pub y: f64,
    /// Standard uncertainty of `y` (independent part), 1/m3.
    pub u_y: f64,
    /// Fitted `y`, 1/m3.
    pub y_fit: f64,
    /// Flow error, fitted over reference minus one, relative.
    pub residual_rel: f64,
    /// Residual over its standard uncertainty.
    pub residual_u: f64,
    /// Leave-one-out residual over its standard uncertainty.
    pub leave_one_out: f64,
    /// Whether the fit used the point.
    pub used: bool,
}

/// One line of the uncertainty budget.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct BudgetRow {
    /// Fraction of the largest calibrated pressure drop this budget is for (1 or 0.1).
    pub at: f64,
    /// Source of uncertainty, for a person.
    pub source: String,
    /// `fit`, `common` or `sensors`.
    pub part: String,
    /// Standard uncertainty of the source.
    pub u: f64,
    /// Unit of `u`.
    pub unit: String,
    /// Relative change of flow per unit of the source.
    pub sensitivity: f64,
    /// Contribution to the relative standard uncertainty of flow.
    pub contribution: f64,
    /// Degrees of freedom; absent means infinite.
    pub degrees_of_freedom: Option<f64>,
}
