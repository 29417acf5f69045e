//! The report page: whole, safe, self-contained, and drawn inside its frames, for runs good, bad and odd.

use evenbore_bench::calibrate::outcome::{
    BudgetRow, Calibration, CommonEffect, Finding, GeometryRatio, MeanState, Range, ResidualRow, UncertaintyRow,
};
use evenbore_bench::report::{Provenance, render};

const A: f64 = 3.412e11;
const B: f64 = 1.63e9;
/// Viscosity of the simulated gas, Pa s.
const VISCOSITY: f64 = 17.6e-6;
/// Mass flow over viscosity, m, for one cubic metre a second.
const X_PER_FLOW: f64 = 1.38 / VISCOSITY;
/// Flow at full scale, m3/s.
const FULL_SCALE: f64 = 22.0 / 60_000.0;

/// A repeatable, roughly normal deviate.
struct Noise(u64);

impl Noise {
    fn next(&mut self) -> f64 {
        let mut uniform = || {
            self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            (self.0 >> 11) as f64 / (1u64 << 53) as f64
        };
        (0..12).map(|_| uniform()).sum::<f64>() - 6.0
    }
}

/// A good run of `n` points from 3 % to full scale, about a quadratic law with noise.
fn simulated(n: usize) -> Calibration {
    let mut noise = Noise(42);
    let flow = |i: usize| FULL_SCALE * 0.03f64.powf(1.0 - (i + 1) as f64 / n as f64);
    Calibration {
        serial: "EB-0042".into(),
        fluid: "nitrogen".into(),
        points_file: "bench/2026-03-12-nitrogen.csv".into(),
        date: "2026-03-12".into(),
        points: n,
        points_used: n,
        a: A,
        b: B,
        u_a: A * 1.1e-3,
        u_b: B * 8.0e-3,
        correlation_ab: 0.412,
        u_a_fit: A * 4.1e-4,
        u_b_fit: B * 6.2e-3,
        correlation_ab_fit: -0.87,
        common: vec![
            effect("reference-flow", 0.001, "rel", -0.001, -0.002),
            effect("viscosity", 0.0008, "rel", -0.0008, 0.0),
            effect("temperature", 0.03, "K", 0.000_071, 0.000_03),
        ],
        b_from_prior: false,
        chi_squared: 9.83,
        degrees_of_freedom: n.saturating_sub(2) as f64,
        p_value: 0.456,
        uncertainty_basis: "stated".into(),
        accepted: true,
        accepted_anyway: None,
        findings: Vec::new(),
        geometry: GeometryRatio { a_ratio: Some(1.0132), b_ratio: Some(0.962) },
        range: Range {
            x_min: flow(0) * X_PER_FLOW,
            x_max: FULL_SCALE * X_PER_FLOW,
            reynolds_max: Some(752.4),
            pressure_drop_max: drop(FULL_SCALE),
        },
        state: MeanState { temperature: 294.65, line_pressure: 118e3, relative_humidity: Some(0.41) },
        uncertainty: (0..=40).map(|i| uncertainty(0.03f64.powf(1.0 - f64::from(i) / 40.0))).collect(),
        residuals: (0..n).map(|i| point(i, flow(i), &mut noise)).collect(),
        budget: [1.0, 0.1].into_iter().flat_map(budget).collect(),
    }
}

fn effect(name: &str, u: f64, unit: &str, a: f64, b: f64) -> CommonEffect {
    CommonEffect { name: name.into(), u, unit: unit.into(), effect_a: a * A, effect_b: b * B }
}

fn drop(flow: f64) -> f64 {
    (A + B * flow * X_PER_FLOW) * VISCOSITY * flow
}

fn point(i: usize, flow: f64, noise: &mut Noise) -> ResidualRow {
    let x = flow * X_PER_FLOW;
    let y_fit = A + B * x;
    let u_rel = f64::hypot(0.0006, 0.4 / drop(flow));
    let z = noise.next();
    ResidualRow {
        line: i as u64 + 2,
        pressure_drop: drop(flow),
        temperature: 293.15 + 0.2 * noise.next(),
        line_pressure: 120_000.0 + 40.0 * noise.next(),
        reference_flow: flow,
        reynolds: Some(752.4 * flow / FULL_SCALE),
        x,
        y: y_fit * (1.0 + z * u_rel),
        u_y: y_fit * u_rel,
        y_fit,
        residual_rel: z * u_rel / (1.0 + B * x / y_fit),
        residual_u: z,
        leave_one_out: z * 1.1,
        used: true,
    }
}

fn uncertainty(share: f64) -> UncertaintyRow {
    let (type_a, common, sensors) = (0.0003 + 0.0003 / (1.0 + 9.0 * share), 0.0011, 0.0007 + 0.000_15 / share);
    UncertaintyRow {
        flow: FULL_SCALE * share,
        pressure_drop: drop(FULL_SCALE * share),
        type_a,
        common,
        sensors,
        expanded: 2.0 * f64::hypot(type_a, f64::hypot(common, sensors)),
        coverage_factor: 2.0,
    }
}

fn budget(at: f64) -> Vec<BudgetRow> {
    let row = |source: &str, part: &str, u: f64, unit: &str, contribution: f64, dof: Option<f64>| BudgetRow {
        at,
        source: source.into(),
        part: part.into(),
        u,
        unit: unit.into(),
        sensitivity: contribution / u,
        contribution,
        degrees_of_freedom: dof,
    };
    vec![
        row("coefficients, from the scatter of the points", "fit", 0.0004, "rel", 0.0004, Some(10.0)),
        row("reference flow", "common", 0.001, "rel", -0.001, None),
        row("viscosity of nitrogen", "common", 0.0008, "rel", -0.0006, None),
        row("pressure drop sensor, gain", "sensors", 0.0005, "rel", 0.000_46, None),
        row("pressure drop sensor, zero", "sensors", 0.2, "Pa", 0.000_04 / at, Some(50.0)),
        row("element temperature", "sensors", 0.1, "K", -0.0003, None),
        row("line pressure", "sensors", 60.0, "Pa", 0.000_01, None),
    ]
}

fn finding(kind: &str, points: &[u64], message: &str, refuses: bool) -> Finding {
    Finding { kind: kind.into(), points: points.to_vec(), message: message.into(), refuses }
}

/// A run whose two highest points are no longer laminar.
fn refused() -> Calibration {
    let mut run = simulated(14);
    for (i, size) in [(12, 9.0), (13, 31.0)] {
        let row = &mut run.residuals[i];
        let u = (row.residual_rel / row.residual_u).abs();
        (row.residual_u, row.residual_rel, row.leave_one_out) = (size, size * u, 1.2 * size);
        row.y = row.y_fit * (1.0 + size * 0.0006);
        row.used = false;
    }
    run.points_used = 12;
    run.accepted = false;
    (run.p_value, run.chi_squared) = (2.0e-9, 1093.4);
    run.range.reynolds_max = Some(2140.0);
    run.findings = vec![
        finding(
            "not-laminar",
            &[14, 15],
            "The two points above Re 1900 need more pressure than the line: flow is leaving the laminar regime.",
            true,
        ),
        finding(
            "stated-uncertainty-too-large",
            &[],
            "The points scatter less than their uncertainties say; a part of them may be shared.",
            false,
        ),
    ];
    run
}

fn provenance() -> Provenance {
    let item = |name: &str, value: &str| (name.to_string(), value.to_string());
    Provenance {
        tool_version: "0.1.0".into(),
        command: "evenbore calibrate bench/2026-03-12-nitrogen.csv --element EB-0042.toml --out out".into(),
        record_crc: Some("5C1A90E7".into()),
        sensors: "as stated on the command line".into(),
        element: vec![
            item("Shape", "round tubes"),
            item("Count", "120"),
            item("Bore", "0.44 mm"),
            item("Length", "120.0 mm"),
        ],
    }
}

/// Renders, checks what must hold for every page, and returns it.
fn checked(calibration: &Calibration) -> String {
    let page = render(calibration, &provenance()).expect("the template renders");
    assert_well_formed(&page);
    assert_self_contained(&page);
    assert_drawn_inside(&page);
    page
}

fn assert_self_contained(page: &str) {
    let lower = page.to_lowercase();
    for word in ["<script", "http", "@import", "url(", "<link", "<img", "src=", "href=", ">nan", " nan", "infinity"] {
        assert!(!lower.contains(word), "{word}");
    }
}

/// Every opened element is closed in order; the void ones used are left alone.
fn assert_well_formed(page: &str) {
    let mut open: Vec<&str> = Vec::new();
    let mut rest = page;
    while let Some(start) = rest.find('<') {
        let end = start + rest[start..].find('>').expect("a tag ends");
        let tag = &rest[start + 1..end];
        rest = &rest[end + 1..];
        let name = tag.trim_start_matches('/').split([' ', '\n', '/']).next().unwrap_or("");
        assert_eq!(tag.matches('"').count() % 2, 0, "{tag}");
        if tag.starts_with('!') || tag.ends_with('/') || name == "meta" {
            continue;
        }
        if tag.starts_with('/') {
            assert_eq!(open.pop(), Some(name), "closed out of order");
        } else {
            open.push(name);
        }
    }
    assert!(open.is_empty(), "left open: {open:?}");
}

/// Every coordinate of every drawing is finite and inside its view box.
fn assert_drawn_inside(page: &str) {
    for drawing in page.split("<svg ").skip(1) {
        let drawing = &drawing[..drawing.find("</svg>").expect("a drawing ends")];
        let size = numbers(attribute(&format!(" {drawing}"), "viewBox").expect("a view box"));
        let inside = |v: f64, side: usize| (0.0..=size[side]).contains(&v);
        for element in drawing.split('<').skip(1) {
            for (name, side) in [("x", 2), ("cx", 2), ("y", 3), ("cy", 3)] {
                let value = attribute(element, name).map(|v| v.parse::<f64>().expect("a number"));
                assert!(value.is_none_or(|v| inside(v, side)), "{element}");
            }
            let path = numbers(attribute(element, "d").unwrap_or(""));
            assert_eq!(path.len() % 2, 0, "{element}");
            assert!(path.chunks(2).all(|p| inside(p[0], 2) && inside(p[1], 3)), "{element}");
        }
    }
}

fn attribute<'a>(element: &'a str, name: &str) -> Option<&'a str> {
    let pattern = format!(" {name}=\"");
    let start = element.find(&pattern)? + pattern.len();
    element[start..].split('"').next()
}

fn numbers(text: &str) -> Vec<f64> {
    let words = text.split(['M', 'L', 'Z', ' ', ',']).filter(|word| !word.is_empty());
    words.map(|word| word.parse().unwrap_or_else(|_| panic!("not a number: {word}"))).collect()
}

/// Leaves the page where a person can look at it, when `EVENBORE_REPORT_PAGES` names a directory.
fn keep(name: &str, page: &str) {
    if let Ok(directory) = std::env::var("EVENBORE_REPORT_PAGES") {
        std::fs::write(std::path::Path::new(&directory).join(name), page).expect("the page is written");
    }
}

#[test]
fn a_good_run_states_its_result() {
    let page = checked(&simulated(12));
    keep("accepted.html", &page);
    assert!(page.contains("<strong>Accepted:</strong>"));
    assert!(page.contains("(3.4120&nbsp;±&nbsp;0.0038)"));
    assert!(page.contains("Nothing was found against this run."));
    assert!(page.contains("coverage factor <i>k</i>&nbsp;=\u{a0}2.00;"));
    assert!(page.contains("EB-0042") && page.contains("12 of 12") && page.contains("5C1A90E7"));
    assert!(page.contains("hold at 21.5\u{a0}°C, 118.0\u{a0}kPa line pressure and a relative humidity of 41\u{a0}%"));
    assert!(page.contains("the sensors of the instrument as stated on the command line."));
    assert_eq!(page.matches("<figcaption>").count(), 3);
}

#[test]
fn a_refused_run_says_why() {
    let run = refused();
    let page = checked(&run);
    keep("refused.html", &page);
    assert!(page.contains("<strong>Refused:</strong> The two points above Re 1900"));
    assert!(run.findings.iter().all(|finding| page.contains(&finding.message)));
    assert!(page.contains("lines 14 and 15") && page.contains("◇ no"));
    assert!(page.contains("The Reynolds number reached 2140"));
}

#[test]
fn an_overridden_run_gives_the_reason_and_what_it_overrules() {
    let mut run = refused();
    run.accepted_anyway = Some("range limited to Re 1900 by the customer".into());
    let page = checked(&run);
    keep("overridden.html", &page);
    assert!(page.contains("<strong>Used although refused:</strong> range limited to Re 1900 by the customer"));
    assert!(page.contains("The run was refused because: The two points"));
}

#[test]
fn an_uncertainty_that_grows_steeply_is_drawn_and_said() {
    let mut run = simulated(9);
    for row in &mut run.uncertainty {
        row.sensors *= 0.1 + 0.02 * (FULL_SCALE / row.flow).powi(2);
        row.expanded = 2.2 * f64::hypot(row.sensors, row.common);
        row.coverage_factor = 2.2;
    }
    run.b_from_prior = true;
    run.uncertainty_basis = "residuals".into();
    run.findings = vec![finding("b-from-prior", &[], "The points do not tell b; the geometry does.", false)];
    let page = checked(&run);
    keep("steep.html", &page);
    assert!(page.contains("at the lowest flow") && page.contains("rests on the geometry"));
}

#[test]
fn text_of_the_user_is_escaped_everywhere() {
    let hostile = "<script>\"&'";
    let mut run = simulated(5);
    (run.serial, run.fluid, run.points_file, run.date) =
        (hostile.into(), hostile.into(), hostile.into(), hostile.into());
    run.findings = vec![finding(hostile, &[2], hostile, true)];
    (run.budget[0].source, run.budget[0].unit, run.budget[0].part) = (hostile.into(), hostile.into(), hostile.into());
    (run.common[0].name, run.common[0].unit) = (hostile.into(), hostile.into());
    run.accepted_anyway = Some(hostile.into());
    let origin = Provenance {
        tool_version: hostile.into(),
        command: hostile.into(),
        record_crc: Some(hostile.into()),
        sensors: hostile.into(),
        element: vec![(hostile.into(), hostile.into())],
    };
    let page = render(&run, &origin).expect("the template renders");
    assert_well_formed(&page);
    assert_self_contained(&page);
    assert!(page.matches("&lt;script&gt;&quot;&amp;&#x27;").count() >= 14);
}

#[test]
fn few_points_and_many_are_drawn() {
    for n in [0, 1, 2, 3, 1000] {
        let page = checked(&simulated(n));
        keep(&format!("points-{n}.html"), &page);
        assert_eq!(page.matches("● yes").count(), n);
    }
}

#[test]
fn what_is_missing_is_a_dash() {
    let mut run = simulated(6);
    run.range.reynolds_max = None;
    run.geometry = GeometryRatio { a_ratio: None, b_ratio: None };
    run.residuals.iter_mut().for_each(|row| row.reynolds = None);
    (run.uncertainty, run.budget, run.common, run.serial) = (vec![], vec![], vec![], String::new());
    let page = render(&run, &Provenance::default()).expect("the template renders");
    keep("missing.html", &page);
    assert_well_formed(&page);
    assert_drawn_inside(&page);
    assert!(page.contains("<dt>Largest Reynolds number</dt><dd>–</dd>"));
    assert!(page.contains("<code>–</code>") && page.contains("<h1>–</h1>"));
    assert!(page.contains("<p class=\"big\">–</p>"));
}

#[test]
fn odd_numbers_stay_inside_the_frames() {
    for value in [0.0, -1.0, 1e300, -1e300, 1e-300, f64::NAN, f64::INFINITY] {
        let mut run = simulated(7);
        for row in &mut run.residuals {
            (row.x, row.y, row.u_y, row.y_fit) = (value, value, value, value);
            (row.residual_rel, row.residual_u, row.reference_flow) = (value, value, value);
        }
        checked(&run);
        for row in &mut run.uncertainty {
            (row.flow, row.type_a, row.common, row.sensors, row.expanded) = (value, value, value, value, value);
        }
        (run.a, run.b, run.u_a, run.u_b, run.u_a_fit, run.range.x_max) = (value, value, value, value, value, value);
        (run.p_value, run.degrees_of_freedom) = (value, value);
        for row in &mut run.budget {
            (row.u, row.contribution, row.sensitivity) = (value, value, value);
        }
        checked(&run);
    }
}
