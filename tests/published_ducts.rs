//! Shapes: the developed profile's integrals against the constants of the law, f Re against printed tables.

mod common;

use common::{Errors, number, rows, sweep, tolerance};
use evenbore::element::ducts::{EQUILATERAL_TRIANGLE, concentric_annulus, ellipse, rectangle};
use evenbore::element::profile::{parallel_plates, round_tube};
use evenbore::element::{Element, Shape};
use evenbore::quantity::Length;

/// Integral of `f` from 0 to 1 by Simpson's rule on `2 n` strips: exact for cubics, and for the profiles' seventh powers
/// within 1e-12 at n = 200.
fn integral(f: impl Fn(f64) -> f64) -> f64 {
    let n = 200;
    let at = |i: usize| f(i as f64 / (2 * n) as f64);
    (0..n).map(|i| at(2 * i) + 4.0 * at(2 * i + 1) + at(2 * i + 2)).sum::<f64>() / (6 * n) as f64
}

/// Mean over the cross-section of a power of u/U: rings of a tube weigh 2 s, layers between plates 1.
fn mean_of_power(shape: Shape, power: i32) -> f64 {
    integral(|s| match shape {
        Shape::RoundTubes => f64::from(round_tube(s as f32)).powi(power) * 2.0 * s,
        _ => f64::from(parallel_plates(s as f32)).powi(power),
    })
}

#[test]
fn profiles_vanish_at_the_wall_and_beyond_and_are_even() {
    for profile in [round_tube, parallel_plates] {
        for beyond in [1.0, -1.0, 1.5, -7.0, f32::INFINITY] {
            assert_eq!(profile(beyond), 0.0);
        }
        assert!(profile(f32::NAN).is_nan());
        for s in sweep(0.0, 1.0, 101).map(|s| s as f32) {
            assert_eq!(profile(s), profile(-s));
        }
    }
    assert_eq!(1.0 / round_tube(0.0), 0.5); // the mean is half the velocity on the axis
    assert!((1.0 / parallel_plates(0.0) - 2.0 / 3.0).abs() < 1e-7); // and two thirds of that in the middle plane
}

#[test]
fn profiles_integrate_to_the_constants_of_the_law() {
    for (shape, exact) in [(Shape::RoundTubes, 2.0), (Shape::ParallelPlates, 54.0 / 35.0)] {
        let constants = shape.constants();
        assert!((mean_of_power(shape, 1) - 1.0).abs() < tolerance::PROFILE_INTEGRAL, "{shape:?}");
        let cube = mean_of_power(shape, 3);
        assert!((cube - exact).abs() < tolerance::PROFILE_INTEGRAL, "{shape:?}: {cube}");
        assert!((cube - f64::from(constants.kinetic_energy_factor)).abs() < tolerance::PROFILE_INTEGRAL, "{shape:?}");
        // The thermal factor is half the kinetic-energy factor of either shape.
        let half = f64::from(constants.thermal_factor * 2.0);
        assert!((cube - half).abs() < tolerance::PROFILE_INTEGRAL, "{shape:?}");
    }
}

#[test]
fn wall_slope_of_the_profile_is_f_re() {
    // f Re = 2 (du/dn) Dh/U at the wall: Dh = 2 R for a tube, 4 h for a gap of 2 h. The profile falls as 2 s n - n^2.
    let n = 1.0 / 1024.0;
    let slope = |profile: fn(f32) -> f32| {
        let (one, two) = (f64::from(profile(1.0 - n)), f64::from(profile(1.0 - 2.0 * n)));
        (4.0 * one - two) / f64::from(2.0 * n)
    };
    for (profile, hydraulic, shape) in
        [(round_tube as fn(f32) -> f32, 2.0, Shape::RoundTubes), (parallel_plates, 4.0, Shape::ParallelPlates)]
    {
        let got = 2.0 * slope(profile) * hydraulic;
        assert!((got / f64::from(shape.constants().friction_reynolds) - 1.0).abs() < 1e-6, "{shape:?}: {got}");
    }
}

#[test]
fn rectangles_as_in_shah_and_london_table_45() {
    let mut errors = Errors::default();
    for row in rows("flow/fRe_rectangular.csv") {
        let aspect = if row[0] == "0.333333" { 1.0 / 3.0 } else { number(&row, 0) as f32 };
        let got = f64::from(rectangle(aspect).unwrap());
        errors.add(got / number(&row, 1) - 1.0, || format!("{row:?}"));
        if row[3] == "seen" {
            assert!((got - number(&row, 2)).abs() <= 0.5e-5 + 1e-6, "{row:?}: {got}"); // half the last printed digit
        }
    }
    assert_eq!(errors.count, 15);
    errors.judge("f Re of rectangles", tolerance::FRICTION_REYNOLDS);
}

#[test]
fn other_ducts_as_in_the_table() {
    let mut errors = Errors::default();
    for row in rows("flow/fRe_other_ducts.csv") {
        let got = match row[0].as_str() {
            "circle" => Shape::RoundTubes.constants().friction_reynolds,
            "parallel plates" => Shape::ParallelPlates.constants().friction_reynolds,
            "equilateral triangle" => EQUILATERAL_TRIANGLE,
            "concentric annulus r_i/r_o" => concentric_annulus(number(&row, 1) as f32).unwrap(),
            "ellipse b/a" => ellipse(number(&row, 1) as f32).unwrap(),
            unknown => panic!("{unknown}"),
        };
        errors.add(f64::from(got) / number(&row, 2) - 1.0, || format!("{row:?}"));
    }
    assert_eq!(errors.count, 29);
    errors.judge("f Re of other ducts", tolerance::FRICTION_REYNOLDS);
}

#[test]
fn ducts_reach_their_limits_and_refuse_what_is_beyond() {
    assert_eq!(rectangle(0.0).unwrap(), 24.0);
    assert_eq!(concentric_annulus(0.0).unwrap(), 16.0);
    assert_eq!(concentric_annulus(1.0).unwrap(), 24.0);
    assert!((ellipse(1.0).unwrap() - 16.0).abs() < 1e-5);
    // A flat ellipse: 2 pi^2 as b goes to 0.
    assert!((ellipse(1e-3).unwrap() / (2.0 * std::f32::consts::PI.powi(2)) - 1.0).abs() < 1e-4);
    // The ring joins the plates' value where its formula is left.
    let (below, above) = (concentric_annulus(0.998_999).unwrap(), concentric_annulus(0.999_001).unwrap());
    assert!((below / above - 1.0).abs() < 1e-6, "{below} {above}");
    for refused in [-0.1, 1.1, f32::NAN, f32::INFINITY] {
        assert!(rectangle(refused).is_err() && concentric_annulus(refused).is_err() && ellipse(refused).is_err());
    }
    assert!(ellipse(0.0).is_err());
}

#[test]
fn a_duct_of_round_or_flat_friction_has_their_a() {
    let mm = Length::from_millimetres;
    let tubes = Element::round_tubes(100, mm(0.5), mm(100.0)).unwrap();
    let plates = Element::parallel_plates(mm(0.2), mm(400.0), mm(60.0)).unwrap();
    for (element, friction) in [(tubes, 16.0), (plates, 24.0)] {
        let duct = Element::duct(friction, element.hydraulic_diameter(), element.open_area(), element.length());
        let duct = duct.unwrap();
        assert!((duct.a() / element.a() - 1.0).abs() < 1e-6);
        assert!((duct.b() * element.open_area() * element.open_area() - 1.0).abs() < 1e-6, "K1 of another shape is 1");
        assert_eq!(duct.shape(), Shape::Other);
        assert_eq!(duct.check(), Ok(()));
    }
    assert!(Element::duct(9.0, mm(0.5), 1e-4, mm(100.0)).is_err());
    assert!(Element::duct(f32::NAN, mm(0.5), 1e-4, mm(100.0)).is_err());
}
