//! Published data through the statistics, one row per published value.
//!
//! Every data set is also run with its input disturbed; a row that still passes then checks nothing and fails the test.

use std::path::Path;

use evenbore_bench::statistics::both_axes::Points;
use evenbore_bench::statistics::distributions::student_t_quantile;
use evenbore_bench::statistics::least_squares::{Fit, LeastSquares};
use evenbore_bench::statistics::rank_one::PairCovariance;

#[path = "common/tolerance.rs"]
mod tolerance;

/// Computed value beside the published one.
struct Row {
    what: String,
    got: f64,
    expected: f64,
    unit: f64,
    tolerance: &'static str,
    source: &'static str,
}

impl Row {
    fn passes(&self) -> bool {
        (self.got - self.expected).abs() <= tolerance::find(self.tolerance).value * self.unit
    }

    fn report(&self) -> String {
        let Self { what, got, expected, unit, tolerance, source } = self;
        let why = tolerance::find(tolerance).why;
        let off = (got - expected).abs() / unit;
        format!("{what}: {got:.17e}, published {expected:e} ({source}), off by {off:.2e}; {tolerance}: {why}")
    }
}

/// Passes the rows as they are and requires each to fail once the input is disturbed by `nudge`, relatively.
fn verify(rows: impl Fn(f64) -> Vec<Row>, nudge: f64) {
    for row in rows(0.0) {
        assert!(row.passes(), "{}", row.report());
    }
    for row in rows(nudge) {
        assert!(!row.passes(), "passes on disturbed input: {}", row.report());
    }
}

/// Printed value: name, value, unit of its last digit, source.
type Printed = (&'static str, f64, f64, &'static str);

/// Puts computed values beside printed ones.
fn printed<const N: usize>(table: [Printed; N], got: [f64; N]) -> Vec<Row> {
    let row = |((what, expected, unit, source), got): (Printed, f64)| Row {
        what: what.into(),
        got,
        expected,
        unit,
        tolerance: "printed",
        source,
    };
    table.into_iter().zip(got).map(row).collect()
}

/// The list with entry `index` disturbed.
fn nudged(list: &[f64], index: usize, nudge: f64) -> Vec<f64> {
    list.iter().enumerate().map(|(i, value)| if i == index { value * (1.0 + nudge) } else { *value }).collect()
}

fn ones(n: usize) -> Vec<f64> {
    vec![1.0; n]
}

fn straight(x: &[f64], y: &[f64]) -> LeastSquares {
    LeastSquares::new(y).column("intercept", &ones(x.len())).column("slope", x)
}

// NIST StRD linear regression ----------------------------------------------------------------------------------------

/// File of the Statistical Reference Datasets: certified estimates with their deviations, and the data.
struct Certified {
    parameters: Vec<(f64, f64)>,
    residual: f64,
    data: Vec<Vec<f64>>,
}

fn numbers(line: &str) -> Vec<f64> {
    line.split_whitespace().filter_map(|word| word.parse().ok()).collect()
}

fn read(name: &str) -> Certified {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/published/strd");
    let text = std::fs::read_to_string(folder.join(format!("{name}.dat"))).expect(name);
    let lines: Vec<&str> = text.lines().collect();
    let is_parameter = |line: &&&str| line.trim_start().starts_with('B') && numbers(line).len() == 2;
    let residual = lines.iter().position(|line| line.trim() == "Residual").expect("residual") + 1;
    Certified {
        parameters: lines[30..60].iter().filter(is_parameter).map(|l| (numbers(l)[0], numbers(l)[1])).collect(),
        residual: numbers(lines[residual])[0],
        data: lines[60..].iter().map(|line| numbers(line)).filter(|row| !row.is_empty()).collect(),
    }
}

/// Columns of the model: the predictors, after a constant where the model has one.
fn predictors(set: &Certified, constant: bool, powers: i32) -> Vec<Vec<f64>> {
    let n = set.data.len();
    let raw = |k: usize, power: i32| set.data.iter().map(|row| row[k].powi(power)).collect::<Vec<_>>();
    let widths = 1..set.data[0].len();
    let rest = widths.flat_map(|k| (1..=powers).map(move |power| (k, power))).map(|(k, power)| raw(k, power));
    constant.then(|| ones(n)).into_iter().chain(rest).collect()
}

fn strd_fit(set: &Certified, constant: bool, powers: i32, nudge: f64) -> Fit {
    let y: Vec<f64> = set.data.iter().map(|row| row[0]).collect();
    let add = |(model, j): (LeastSquares, usize), x: Vec<f64>| (model.column(&format!("B{j}"), &x), j + 1);
    let start = (LeastSquares::new(&nudged(&y, 1, nudge)), 0);
    predictors(set, constant, powers).into_iter().fold(start, add).0.solve().expect("certified fit")
}

/// Estimates, their deviations and last the residual deviation; what is certified as zero is compared absolutely.
fn strd_rows(name: &str, (constant, powers): (bool, i32), keys: (&'static str, &'static str), nudge: f64) -> Vec<Row> {
    let set = read(name);
    let fit = strd_fit(&set, constant, powers, nudge);
    let spread = fit.scaled_covariance().expect("degrees of freedom").diagonal().map(f64::sqrt);
    let residual = fit.residual_variance().expect("degrees of freedom").sqrt();
    let (estimate, deviation) = keys;
    let row = |tolerance: &'static str, j: usize, got: f64, expected: f64| {
        let unit = if expected == 0.0 { 1.0 } else { expected.abs() };
        Row { what: format!("{name} {j}"), got, expected, unit, tolerance, source: "NIST StRD, certified" }
    };
    assert_eq!(set.parameters.len(), fit.solution.len());
    let estimates = set.parameters.iter().enumerate().map(|(j, pair)| row(estimate, j, fit.solution[j], pair.0));
    let deviations = set.parameters.iter().enumerate().map(|(j, pair)| row(deviation, j, spread[j], pair.1));
    let last = row(estimate, set.parameters.len(), residual, set.residual);
    estimates.chain(deviations).chain([last]).collect()
}

#[test]
fn strd_norris() {
    verify(|nudge| strd_rows("Norris", (true, 1), ("Norris", "Norris"), nudge), 1e-6);
}

#[test]
fn strd_no_intercept_1() {
    verify(|nudge| strd_rows("NoInt1", (false, 1), ("one parameter", "one parameter"), nudge), 1e-6);
}

#[test]
fn strd_no_intercept_2() {
    verify(|nudge| strd_rows("NoInt2", (false, 1), ("one parameter", "one parameter"), nudge), 1e-6);
}

#[test]
fn strd_longley() {
    verify(|nudge| strd_rows("Longley", (true, 1), ("Longley", "Longley deviations"), nudge), 1e-6);
}

#[test]
fn strd_wampler_1() {
    verify(|nudge| strd_rows("Wampler1", (true, 5), ("Wampler1", "Wampler1"), nudge), 1e-6);
}

#[test]
fn strd_wampler_2() {
    verify(|nudge| strd_rows("Wampler2", (true, 5), ("Wampler2", "Wampler1"), nudge), 1e-6);
}

// Guide to the expression of uncertainty in measurement --------------------------------------------------------------

/// Calibration of a thermometer: temperatures in °C and corrections in °C (JCGM 100:2008, table H.6).
#[rustfmt::skip]
const H3: [[f64; 11]; 2] = [
    [21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511],
    [-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.160],
];

#[rustfmt::skip]
const H3_PUBLISHED: [Printed; 11] = [
    ("H.3 intercept",             -0.1712,               1e-4,  "JCGM 100:2008, H.3.3"),
    ("H.3 u(intercept)",           0.0029,               1e-4,  "JCGM 100:2008, H.3.3"),
    ("H.3 slope",                  0.00218,              1e-5,  "JCGM 100:2008, H.3.3"),
    ("H.3 u(slope)",               0.00067,              1e-5,  "JCGM 100:2008, H.3.3"),
    ("H.3 correlation",           -0.930,                1e-2,  "JCGM 100:2008, H.3.3"),
    ("H.3 s",                      0.0035,               1e-4,  "JCGM 100:2008, H.3.3"),
    ("H.3 correction at 30 C",    -0.1494,               1e-4,  "JCGM 100:2008, H.3.4"),
    ("H.3 u(correction at 30 C)",  0.0041,               1e-4,  "JCGM 100:2008, H.3.4"),
    ("H.3 intercept, all digits", -0.171203790131350,    1e-14, "GUM Tree Calculator, GUM_H3"),
    ("H.3 slope, all digits",      0.00218269773988729,  1e-16, "GUM Tree Calculator, GUM_H3"),
    ("H.3 u(slope), all digits",   0.000667938773227833, 1e-17, "GUM Tree Calculator, GUM_H3"),
];

fn h3_rows(nudge: f64) -> Vec<Row> {
    let from_20: Vec<f64> = nudged(&H3[0], 0, nudge).iter().map(|t| t - 20.0).collect();
    let fit = straight(&from_20, &nudged(&H3[1], 9, nudge)).solve().expect("H.3");
    let variance = fit.residual_variance().expect("degrees of freedom");
    let covariance = PairCovariance::from_fit(&fit).expect("two parameters").scaled(variance);
    let ([a, b], [ua, ub]) = ([fit.solution[0], fit.solution[1]], covariance.standard_uncertainties());
    let (at_30, u_at_30) = (a + 10.0 * b, covariance.variance_along([1.0, 10.0]).sqrt());
    printed(H3_PUBLISHED, [a, ua, b, ub, covariance.correlation(), variance.sqrt(), at_30, u_at_30, a, b, ub])
}

#[test]
fn thermometer_of_the_guide() {
    verify(h3_rows, 0.2);
}

/// Degrees of freedom, coverage probability in per cent, t, unit of its last digit, source.
type Student = (f64, f64, f64, f64, &'static str);

#[rustfmt::skip]
const STUDENT: &[Student] = &[
    ( 1.0,          68.27,   1.84,     1e-2, "JCGM 100:2008, table G.2"),
    ( 1.0,          95.00,  12.71,     1e-2, "JCGM 100:2008, table G.2"),
    ( 1.0,          99.73, 235.80,     1e-1, "JCGM 100:2008, table G.2"),
    ( 2.0,          99.73,  19.21,     1e-2, "JCGM 100:2008, table G.2"),
    ( 5.0,          99.73,   5.51,     1e-2, "JCGM 100:2008, table G.2"),
    (10.0,          90.00,   1.81,     1e-2, "JCGM 100:2008, table G.2"),
    (11.0,          99.00,   3.11,     1e-2, "JCGM 100:2008, table G.2"),
    (20.0,          90.00,   1.72,     1e-2, "JCGM 100:2008, table G.2"),
    (20.0,          95.00,   2.09,     1e-2, "JCGM 100:2008, table G.2"),
    (f64::INFINITY, 95.45,   2.00,     1e-2, "JCGM 100:2008, table G.2"),
    (f64::INFINITY, 99.73,   3.00,     1e-2, "JCGM 100:2008, table G.2"),
    ( 1.0,          95.45,  13.967811, 1e-6, "scipy.stats.t"),
    ( 2.0,          95.45,   4.526551, 1e-6, "scipy.stats.t"),
    ( 3.0,          95.45,   3.306830, 1e-6, "scipy.stats.t"),
    ( 4.0,          95.45,   2.869315, 1e-6, "scipy.stats.t"),
    ( 5.0,          95.45,   2.648654, 1e-6, "scipy.stats.t"),
    ( 8.0,          95.45,   2.366419, 1e-6, "scipy.stats.t"),
    (10.0,          95.45,   2.283682, 1e-6, "scipy.stats.t"),
    (20.0,          95.45,   2.133028, 1e-6, "scipy.stats.t"),
    (50.0,          95.45,   2.051251, 1e-6, "scipy.stats.t"),
    (1e2,           95.45,   2.025312, 1e-6, "scipy.stats.t"),
    (1e9,           95.45,   2.000002, 1e-6, "scipy.stats.t"),
    ( 1.0,          68.27,   1.837409, 1e-6, "scipy.stats.t"),
    ( 1.0,          99.73, 235.783687, 1e-6, "scipy.stats.t"),
    ( 3.0,          95.00,   3.182446, 1e-6, "scipy.stats.t"),
    (10.0,          95.00,   2.228139, 1e-6, "scipy.stats.t"),
    (1e2,           99.00,   2.625891, 1e-6, "scipy.stats.t"),
    (1e9,           68.27,   1.000022, 1e-6, "scipy.stats.t"),
    (1e9,           95.00,   1.959964, 1e-6, "scipy.stats.t"),
    (1e9,           99.73,   2.999977, 1e-6, "scipy.stats.t"),
];

fn student_rows(nudge: f64) -> Vec<Row> {
    let row = |&(dof, percent, expected, unit, source): &Student| Row {
        what: format!("t for {percent} % with {dof} degrees of freedom"),
        got: student_t_quantile(0.5 + percent * (1.0 + nudge) / 200.0, dof).expect("in the table"),
        expected,
        unit,
        tolerance: "printed",
        source,
    };
    STUDENT.iter().map(row).collect()
}

#[test]
fn student_table_of_the_guide() {
    verify(student_rows, -0.01);
}

// Straight-line calibration functions --------------------------------------------------------------------------------

/// Ordinates, their standard uncertainties, and the response to be evaluated with its standard uncertainty.
type Calibration = ([f64; 6], [f64; 6], [f64; 2]);

/// Abscissae of both examples.
const STIMULI: [f64; 6] = [1.0, 2.0, 3.0, 4.0, 5.0, 6.0];

const EQUAL: Calibration = ([3.3, 5.6, 7.1, 9.3, 10.7, 12.1], [0.5; 6], [10.5, 0.5]);

const UNEQUAL: Calibration = ([3.2, 4.3, 7.6, 8.6, 11.7, 12.8], [0.5, 0.5, 0.5, 1.0, 1.0, 1.0], [10.5, 1.0]);

#[rustfmt::skip]
const EQUAL_PUBLISHED: [Printed; 8] = [
    ("WLS1 a",      1.866667,  1e-6, "ISO/TS 28037:2010, page 13"),
    ("WLS1 b",      1.757143,  1e-6, "ISO/TS 28037:2010, page 13"),
    ("WLS1 u(a)",   0.4654747, 1e-7, "ISO/TS 28037:2010, page 13"),
    ("WLS1 u(b)",   0.1195229, 1e-7, "ISO/TS 28037:2010, page 13"),
    ("WLS1 cov",   -0.050,     1e-3, "ISO/TS 28037:2010, page 13"),
    ("WLS1 chi2",   1.665,     1e-3, "ISO/TS 28037:2010, page 13"),
    ("WLS1 x0",     4.913,     1e-3, "ISO/TS 28037:2010, page 13"),
    ("WLS1 u(x0)",  0.322,     1e-3, "ISO/TS 28037:2010, page 13"),
];

#[rustfmt::skip]
const UNEQUAL_PUBLISHED: [Printed; 8] = [
    ("WLS2 a",      0.8852,     1e-4, "ISO/TS 28037:2010, page 14"),
    ("WLS2 b",      2.057,      1e-3, "ISO/TS 28037:2010, page 14"),
    ("WLS2 u(a)",   0.5297081,  1e-7, "ISO/TS 28037:2010, page 14"),
    ("WLS2 u(b)",   0.177892,   1e-6, "ISO/TS 28037:2010, page 14"),
    ("WLS2 cov",   -0.08227848, 1e-8, "ISO/TS 28037:2010, page 14"),
    ("WLS2 chi2",   4.131,      1e-3, "ISO/TS 28037:2010, page 14"),
    ("WLS2 x0",     4.674,      1e-3, "ISO/TS 28037:2010, page 14"),
    ("WLS2 u(x0)",  0.533,      1e-3, "ISO/TS 28037:2010, page 14"),
];

/// a, b, u(a), u(b), cov(a, b), chi-squared, and the stimulus of the response with its standard uncertainty.
fn calibration((y, u, [response, u_response]): Calibration, nudge: f64) -> [f64; 8] {
    let model = straight(&nudged(&STIMULI, 4, nudge), &nudged(&y, 2, nudge)).uncertainties(&nudged(&u, 5, nudge));
    let fit = model.solve().expect("calibration");
    let covariance = PairCovariance::from_fit(&fit).expect("two parameters");
    let ([a, b], [ua, ub]) = ([fit.solution[0], fit.solution[1]], covariance.standard_uncertainties());
    let stimulus = (response - a) / b;
    let variance = u_response * u_response + covariance.variance_along([1.0, stimulus]);
    [a, b, ua, ub, covariance.0[0][1], fit.chi_squared, stimulus, variance.sqrt() / b]
}

#[test]
fn calibration_with_equal_uncertainties() {
    verify(|nudge| printed(EQUAL_PUBLISHED, calibration(EQUAL, nudge)), 0.05);
}

#[test]
fn calibration_with_unequal_uncertainties() {
    verify(|nudge| printed(UNEQUAL_PUBLISHED, calibration(UNEQUAL, nudge)), 0.05);
}

// Both coordinates uncertain -----------------------------------------------------------------------------------------

/// Pearson's points of 1901 with York's weights of 1966: x, its weight, y, its weight.
#[rustfmt::skip]
const PEARSON_YORK: [[f64; 10]; 4] = [
    [0.0,    0.9,    1.8,   2.6,   3.3,   4.4,  5.2,  6.1,  6.5,   7.4],
    [1000.0, 1000.0, 500.0, 800.0, 200.0, 80.0, 60.0, 20.0, 1.8,   1.0],
    [5.9,    5.4,    4.4,   4.6,   3.5,   3.7,  2.8,  2.8,  2.4,   1.5],
    [1.0,    1.8,    4.0,   8.0,   20.0,  20.0, 70.0, 70.0, 100.0, 500.0],
];

#[rustfmt::skip]
const PEARSON_YORK_PUBLISHED: [Printed; 8] = [
    ("York intercept",                5.47991022,  1e-8, "Neri et al., J. Phys. E 22 (1989) 215"),
    ("York slope",                   -0.480533407, 1e-9, "Neri et al., J. Phys. E 22 (1989) 215"),
    ("York chi2/dof",                 1.4833,      1e-4, "Neri et al., J. Phys. E 22 (1989) 215"),
    ("York u(intercept), adjusted",   0.295,       1e-3, "York et al., Am. J. Phys. 72 (2004) 367"),
    ("York u(slope), adjusted",       0.058,       1e-3, "York et al., Am. J. Phys. 72 (2004) 367"),
    ("York u(intercept), propagated", 0.29193,     1e-5, "Kalantar, Meas. Sci. Technol. 3 (1992) 1113"),
    ("York u(slope), propagated",     0.057617,    1e-6, "Kalantar, Meas. Sci. Technol. 3 (1992) 1113"),
    ("York cov, propagated",         -0.0162,      1e-4, "Kalantar, Meas. Sci. Technol. 3 (1992) 1113"),
];

/// What one standard uncertainty of a coordinate does to intercept and slope, by central differences.
fn effect(points: &Points, i: usize, shift: [f64; 2]) -> [f64; 2] {
    let moved = |sign: f64| {
        let (mut x, mut y) = (points.x.to_vec(), points.y.to_vec());
        x[i] += sign * 1e-4 * shift[0];
        y[i] += sign * 1e-4 * shift[1];
        let line = Points { x: &x, y: &y, ..*points }.line().expect("moved line");
        [line.intercept, line.slope]
    };
    let (up, down) = (moved(1.0), moved(-1.0));
    [(up[0] - down[0]) / 2e-4, (up[1] - down[1]) / 2e-4]
}

/// Covariance by propagating the uncertainty of every coordinate; it differs from York's in second order.
fn propagated(points: &Points) -> PairCovariance {
    let shifts = |i: usize| [[points.x_uncertainty[i], 0.0], [0.0, points.y_uncertainty[i]]];
    let effects = (0..points.x.len()).flat_map(|i| shifts(i).map(|shift| effect(points, i, shift)));
    effects.fold(PairCovariance([[0.0; 2]; 2]), PairCovariance::with_common)
}

fn pearson_york_rows(nudge: f64) -> Vec<Row> {
    let [x, wx, y, wy] = PEARSON_YORK;
    let deviations = |weights: &[f64]| weights.iter().map(|w| w.sqrt().recip()).collect::<Vec<_>>();
    let (x, y) = (nudged(&x, 3, nudge), nudged(&y, 8, nudge));
    let (ux, uy) = (deviations(&wx), deviations(&nudged(&wy, 9, -nudge)));
    let points = Points { x: &x, y: &y, x_uncertainty: &ux, y_uncertainty: &uy, correlation: &[0.0; 10] };
    let line = points.line().expect("line");
    let (adjusted, moved) = (line.covariance.standard_uncertainties(), propagated(&points));
    let reduced = line.chi_squared / line.degrees_of_freedom as f64;
    let ([ua, ub], [pa, pb]) = (adjusted, moved.standard_uncertainties());
    printed(PEARSON_YORK_PUBLISHED, [line.intercept, line.slope, reduced, ua, ub, pa, pb, moved.0[0][1]])
}

#[test]
fn pearson_york() {
    verify(pearson_york_rows, 0.1);
}
