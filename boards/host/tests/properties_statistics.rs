//! What must hold for any data: symmetries of the fits and the order of the distributions.

use evenbore_bench::statistics::both_axes::{Line, Points};
use evenbore_bench::statistics::distributions::{chi_squared_upper, coverage_factor, f_upper, student_t_quantile};
use evenbore_bench::statistics::least_squares::{Fit, LeastSquares};
use evenbore_bench::statistics::rank_one::PairCovariance;
use evenbore_bench::statistics::welch::{Component, effective_dof};
use proptest::prelude::*;

/// Point of a line: position, scatter in units of its uncertainties, those uncertainties, their correlation.
type Point = (f64, f64, f64, f64, f64);

/// Points whose abscissae spread enough to carry a slope.
fn points() -> impl Strategy<Value = Vec<Point>> {
    let point = (0.0..0.5, -1.5..1.5, 0.02..0.1, 0.05..0.2, -0.9..0.9);
    let spaced = |(i, (x, z, ux, uy, r)): (usize, Point)| (i as f64 + x, z, ux, uy, r);
    prop::collection::vec(point, 4..12).prop_map(move |list| list.into_iter().enumerate().map(spaced).collect())
}

fn column(points: &[Point], pick: impl Fn(&Point) -> f64) -> Vec<f64> {
    points.iter().map(pick).collect()
}

fn ordinate(&(x, z, _, uy, _): &Point) -> f64 {
    1.5 + 0.8 * x + z * uy
}

/// Weighted line through the points.
fn model(points: &[Point], x: impl Fn(f64) -> f64, y: impl Fn(f64) -> f64, scale: f64) -> Fit {
    LeastSquares::new(&column(points, |p| y(ordinate(p))))
        .column("intercept", &column(points, |_| 1.0))
        .column("slope", &column(points, |p| x(p.0)))
        .uncertainties(&column(points, |p| scale * p.3))
        .solve()
        .expect("well spread points")
}

fn york(points: &[Point], x_scale: f64) -> Line {
    Points {
        x: &column(points, |p| p.0),
        y: &column(points, ordinate),
        x_uncertainty: &column(points, |p| x_scale * p.2),
        y_uncertainty: &column(points, |p| p.3),
        correlation: &column(points, |p| p.4),
    }
    .line()
    .expect("well spread points")
}

/// Whether two numbers agree relative to a size.
fn close(got: f64, expected: f64, size: f64) -> bool {
    (got - expected).abs() <= 1e-11 * size.abs()
}

/// Text of the refusal of a fit.
fn refusal(model: LeastSquares) -> String {
    model.solve().unwrap_err().to_string()
}

#[test]
fn refusals_name_what_is_wrong() {
    let model = LeastSquares::new(&[1.0, 2.0, 2.5]).column("a", &[1.0; 3]).column("b", &[1.0, 2.0, 3.0]);
    assert!(refusal(model.clone().column("c", &[3.0, 5.0, 7.0])).contains("`c`"));
    assert!(refusal(model.clone().column("zero", &[0.0; 3])).contains("`zero`"));
    assert!(refusal(model.clone().column("short", &[1.0])).contains("short has 1 entries, 3"));
    assert!(refusal(model.clone().column("c", &[1.0, f64::NAN, 2.0])).contains("entry 1 of c is NaN"));
    assert!(refusal(model.clone().uncertainties(&[0.1, 0.0, 0.1])).contains("entry 1 of uncertainties is 0"));
    assert!(refusal(model.clone().prior("b", 1.0, 0.1)).contains("uncertainties has 0 entries, 3"));
    assert!(refusal(model.uncertainties(&[0.1; 3]).prior("slope", 1.0, 0.1)).contains("`slope`"));
    assert!(refusal(LeastSquares::new(&[1.0])).contains("columns has 0 entries, 1"));
    assert!(refusal(LeastSquares::new(&[]).column("a", &[])).contains("observations and priors has 0"));
}

/// A point that alone carries a parameter cannot be left out.
#[test]
fn indispensable_points_have_no_deviation() {
    let model = LeastSquares::new(&[1.0, 1.2, 5.0]).column("a", &[1.0; 3]).column("b", &[0.0, 0.0, 1.0]);
    let left_out = model.uncertainties(&[0.1; 3]).solve().unwrap().leave_one_out();
    assert!(left_out[0].is_some() && left_out[2].is_none());
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(256))]

    /// Moving the abscissae moves the intercept along the line and nothing else.
    #[test]
    fn fit_follows_a_shift(points in points(), shift in -100.0_f64..100.0) {
        let (here, there) = (model(&points, |x| x, |y| y, 1.0), model(&points, |x| x + shift, |y| y, 1.0));
        let moved = here.solution[0] - shift * here.solution[1];
        prop_assert!(close(there.solution[1], here.solution[1], 1.0));
        prop_assert!(close(there.solution[0], moved, 1.0 + shift.abs()));
        prop_assert!(close(there.chi_squared, here.chi_squared, 1.0 + here.chi_squared));
    }

    /// Other units of either axis change the parameters by their ratio and leave chi-squared and leverages.
    #[test]
    fn fit_follows_a_change_of_units(points in points(), decades in (-6.0..6.0, -6.0..6.0)) {
        let (sx, sy) = (10f64.powf(decades.0), 10f64.powf(decades.1));
        let (here, there) = (model(&points, |x| x, |y| y, 1.0), model(&points, |x| sx * x, |y| sy * y, sy));
        prop_assert!(close(there.solution[0], here.solution[0] * sy, sy));
        prop_assert!(close(there.solution[1], here.solution[1] * sy / sx, sy / sx));
        prop_assert!(close(there.chi_squared, here.chi_squared, 1.0 + here.chi_squared));
        let pairs = there.leverages.iter().zip(&here.leverages);
        prop_assert!(pairs.into_iter().all(|(a, b)| close(*a, *b, 1.0)));
        let (u, v) = (there.standard_uncertainties(), here.standard_uncertainties());
        prop_assert!(close(u[1], v[1] * sy / sx, v[1] * sy / sx));
    }

    /// The order of the points is no information.
    #[test]
    fn fits_ignore_the_order(points in points(), turn in 1usize..4) {
        let mut other = points.clone();
        other.reverse();
        other.rotate_left(turn);
        let (a, b) = (model(&points, |x| x, |y| y, 1.0), model(&other, |x| x, |y| y, 1.0));
        prop_assert!(close(a.solution[0], b.solution[0], 1.0) && close(a.solution[1], b.solution[1], 1.0));
        let (a, b) = (york(&points, 1.0), york(&other, 1.0));
        prop_assert!(close(a.intercept, b.intercept, 1.0) && close(a.slope, b.slope, 1.0));
        prop_assert!(close(a.chi_squared, b.chi_squared, 1.0 + b.chi_squared));
    }

    /// Leverages sum to the number of parameters when no prior shares in them.
    #[test]
    fn leverages_count_the_parameters(points in points()) {
        prop_assert!(close(model(&points, |x| x, |y| y, 1.0).leverages.iter().sum(), 2.0, 1.0));
    }

    /// The leave-one-out deviation is the one found by really leaving the point out.
    #[test]
    fn leave_one_out_is_what_it_says(points in points(), at in 0usize..4) {
        let all = model(&points, |x| x, |y| y, 1.0);
        let mut rest = points.clone();
        let (left_out, u) = (rest.remove(at), points[at].3);
        let fit = model(&rest, |x| x, |y| y, 1.0);
        let predicted = fit.solution[0] + fit.solution[1] * left_out.0;
        let [va, vab, vb] = [fit.covariance[(0, 0)], fit.covariance[(0, 1)], fit.covariance[(1, 1)]];
        let variance = u * u + va + left_out.0 * (2.0 * vab + left_out.0 * vb);
        let z = (ordinate(&left_out) - predicted) / variance.sqrt();
        prop_assert!(close(all.leave_one_out()[at].unwrap(), z, 1.0 + z.abs()));
        let scatter = (fit.chi_squared / fit.degrees_of_freedom as f64).sqrt();
        let t = all.studentised()[at].unwrap();
        prop_assert!((t - z / scatter).abs() <= 1e-9 * (1.0 + t.abs()) || scatter < 1e-3);
    }

    /// A prior does what the same knowledge as one more observation of the slope does.
    #[test]
    fn prior_is_an_observation(points in points(), value in 0.0..2.0, u in 0.01..1.0) {
        let y = column(&points, ordinate);
        let (one, x, uy) = (column(&points, |_| 1.0), column(&points, |p| p.0), column(&points, |p| p.3));
        let with_prior = LeastSquares::new(&y).column("a", &one).column("b", &x).uncertainties(&uy);
        let with_prior = with_prior.prior("b", value, u).solve().unwrap();
        let longer = |list: &[f64], last: f64| list.iter().copied().chain([last]).collect::<Vec<_>>();
        let with_row = LeastSquares::new(&longer(&y, value)).column("a", &longer(&one, 0.0));
        let with_row = with_row.column("b", &longer(&x, 1.0)).uncertainties(&longer(&uy, u)).solve().unwrap();
        prop_assert_eq!(&with_prior.solution, &with_row.solution);
        prop_assert_eq!(with_prior.chi_squared, with_row.chi_squared);
        prop_assert_eq!(with_prior.degrees_of_freedom, with_row.degrees_of_freedom);
        prop_assert_eq!(with_prior.leave_one_out().len() + 1, with_row.leave_one_out().len());
    }

    /// Certain abscissae turn the line in both coordinates into the weighted one.
    #[test]
    fn york_without_abscissa_uncertainty_is_weighted(points in points()) {
        let (line, fit) = (york(&points, 0.0), model(&points, |x| x, |y| y, 1.0));
        prop_assert!(close(line.intercept, fit.solution[0], 1.0) && close(line.slope, fit.solution[1], 1.0));
        prop_assert!(close(line.chi_squared, fit.chi_squared, 1.0 + fit.chi_squared));
        let expected = PairCovariance::from_fit(&fit).unwrap();
        let pairs = line.covariance.0.into_iter().flatten().zip(expected.0.into_iter().flatten());
        prop_assert!(pairs.into_iter().all(|(got, expected)| close(got, expected, expected)));
    }

    /// The axes are equal: exchanging them turns the slope into its reciprocal.
    #[test]
    fn york_treats_the_axes_alike(points in points()) {
        let (x, y) = (column(&points, |p| p.0), column(&points, ordinate));
        let (ux, uy, r) = (column(&points, |p| p.2), column(&points, |p| p.3), column(&points, |p| p.4));
        let turned = Points { x: &y, y: &x, x_uncertainty: &uy, y_uncertainty: &ux, correlation: &r }.line().unwrap();
        let line = york(&points, 1.0);
        prop_assert!(close(turned.slope * line.slope, 1.0, 1.0));
        prop_assert!(close(turned.chi_squared, line.chi_squared, 1.0 + line.chi_squared));
    }

    /// Adding a multiple of x to y adds it to the slope, once the correlations are carried along.
    #[test]
    fn york_follows_a_shear(points in points(), c in -2.0_f64..2.0) {
        let sheared = |&(x, _, ux, uy, r): &Point| {
            let variance = uy * uy + c * ux * (c * ux + 2.0 * r * uy);
            (x, variance.sqrt(), (r * uy + c * ux) / variance.sqrt())
        };
        let y = column(&points, |p| ordinate(p) + c * p.0);
        let (x, ux) = (column(&points, |p| p.0), column(&points, |p| p.2));
        let (uy, r) = (column(&points, |p| sheared(p).1), column(&points, |p| sheared(p).2));
        let turned = Points { x: &x, y: &y, x_uncertainty: &ux, y_uncertainty: &uy, correlation: &r }.line().unwrap();
        let line = york(&points, 1.0);
        prop_assert!(close(turned.slope, line.slope + c, 4.0) && close(turned.intercept, line.intercept, 4.0));
        prop_assert!(close(turned.chi_squared, line.chi_squared, 1.0 + line.chi_squared));
    }

    /// A larger chi-squared is less likely, and one numerator degree of freedom is Student squared.
    #[test]
    fn tails_fall(chi2 in 0.0..60.0, more in 0.1..10.0, dof in 1.0..40.0, t in 0.5_f64..4.0) {
        let (nearer, farther) = (chi_squared_upper(chi2, dof).unwrap(), chi_squared_upper(chi2 + more, dof).unwrap());
        prop_assert!(farther < nearer || farther > 1.0 - 1e-9);
        let p = f_upper(t * t, 1.0, dof).unwrap();
        prop_assert!((student_t_quantile(1.0 - 0.5 * p, dof).unwrap() - t).abs() < 1e-8);
    }

    /// Less knowledge of the uncertainty never makes a smaller interval.
    #[test]
    fn coverage_factor_falls(decade in 0.0..8.0, step in 0.01..1.0) {
        let (few, many) = (10f64.powf(decade), 10f64.powf(decade + step));
        prop_assert!(coverage_factor(few).unwrap() > coverage_factor(many).unwrap());
        prop_assert!(coverage_factor(many).unwrap() > coverage_factor(f64::INFINITY).unwrap());
    }

    /// The combined degrees of freedom lie between the smallest and the sum.
    #[test]
    fn welch_stays_between_its_bounds(list in prop::collection::vec((0.1..5.0, 1.0..50.0), 1..6)) {
        let components: Vec<_> = list.iter().map(|&(uncertainty, dof)| Component { uncertainty, dof }).collect();
        let combined = effective_dof(&components).unwrap();
        let least = list.iter().map(|c| c.1).fold(f64::INFINITY, f64::min);
        let sum: f64 = list.iter().map(|c| c.1).sum();
        prop_assert!(combined >= least * (1.0 - 1e-12) && combined <= sum * (1.0 + 1e-12));
    }
}
