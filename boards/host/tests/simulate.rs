//! Scenarios: the shipped ones can be run, the same seed gives the same file, and what cannot be says why.

use evenbore_bench::input::toml_text::TomlText;
use evenbore_bench::virtual_bench::run::{Simulated, as_csv, simulate};
use evenbore_bench::virtual_bench::scenario::Scenario;
use std::path::Path;

const ELEMENT: &str = "
interval_s = 10.0
[element]
serial = \"T\"
shape = \"round-tubes\"
count = 120
bore_mm = 0.44
length_mm = 120.0
expansion_per_K = 16e-6
reference_temperature_C = 20.0
";

fn scenario(rest: &str) -> Result<Scenario, String> {
    let text = TomlText::new("scenario.toml", &format!("{ELEMENT}{rest}"));
    Scenario::read(&text, Path::new("")).map_err(|problem| problem.to_string())
}

fn run(rest: &str) -> Result<Simulated, String> {
    simulate(&scenario(rest)?, &|_, _| {}).map_err(|problem| problem.to_string())
}

fn segment(fluid: &str, drop: &str, celsius: &str, kpa: &str) -> String {
    format!(
        "[[segment]]\nduration_s = 60.0\nfluid = \"{fluid}\"\npressure_drop_Pa = {drop}\ntemperature_C = {celsius}\n\
         line_pressure_kPa = {kpa}\n"
    )
}

#[test]
fn shipped_scenarios_can_be_read() {
    let folder = Path::new(concat!(env!("CARGO_MANIFEST_DIR"), "/../../examples/workshop/scenarios"));
    let files: Vec<_> = std::fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    assert_eq!(files.len(), 19);
    for file in files {
        Scenario::open(&file).unwrap_or_else(|problem| panic!("{problem}"));
    }
}

#[test]
fn a_seed_gives_one_file_and_errors_are_those_told() {
    let quiet = segment("nitrogen", "1000.0", "20.0", "120.0");
    let noisy = format!("[sensors.pressure_drop]\nnoise_Pa = 1.0\n{quiet}");
    let [exact, first, second] = [&quiet, &noisy, &noisy].map(|text| run(text).unwrap());
    assert_eq!(as_csv(&first), as_csv(&second));
    assert_ne!(as_csv(&exact), as_csv(&first));
    assert_eq!(exact.rows.len(), 6);
    for (row, noisy) in exact.rows.iter().zip(&first.rows) {
        assert_eq!(row.readings[0], Some(1000.0));
        assert_eq!(row.mass_flow, noisy.mass_flow);
        assert!((noisy.readings[0].unwrap() - 1000.0).abs() < 5.0);
    }
}

#[test]
fn faults_do_what_they_say() {
    let day = segment("nitrogen", "1000.0", "20.0", "120.0");
    let with =
        |fault: &str| run(&format!("[sensors.reference_flow]\n{day}[[fault]]\nfrom_s = 30.0\n{fault}\n")).unwrap();
    let last = |simulated: &Simulated, i: usize| simulated.rows[5].readings[i];
    let plain = with("kind = \"zero\"\nsensor = \"pressure_drop\"\nsize_Pa = 3.0");
    assert_eq!((plain.rows[0].readings[0], last(&plain, 0)), (Some(1000.0), Some(1003.0)));
    assert_eq!(last(&with("kind = \"open\"\nsensor = \"temperature\""), 1), None);
    assert_eq!(last(&with("kind = \"saturation\"\nsensor = \"pressure_drop\"\nsize_Pa = 900.0"), 0), Some(900.0));
    let swapped = with("kind = \"swapped-ports\"");
    assert_eq!((last(&swapped, 0), last(&swapped, 2)), (Some(-1000.0), Some(119e3)));
    let leak = with("kind = \"leak\"\nsize_L_min = 0.06");
    assert!((leak.rows[5].volume_flow - last(&leak, 4).unwrap() - 1e-6).abs() < 1e-12);
    let wrong = with("kind = \"wrong-gas\"\nfluid = \"helium\"");
    assert!(wrong.rows[5].volume_flow / wrong.rows[0].volume_flow > 0.85 && wrong.rows[5].fluid == "nitrogen");
    assert!(wrong.rows[5].mass_flow < 0.2 * wrong.rows[0].mass_flow);
    // Mean flow under pulsation: lower than that of the mean pressure drop, by eps r^2 and less.
    let pulsing = with("kind = \"pulsation\"\nsize_rel = 0.3");
    let change = pulsing.rows[5].mass_flow / pulsing.rows[0].mass_flow - 1.0;
    assert!(change < -1e-4 && change > -1e-2, "{change}");
    assert!(last(&with("kind = \"transition\"\nfrom_reynolds = 50.0\nsize_rel = 0.5"), 0).unwrap() > 1010.0);
}

#[test]
fn interpolated_flows_are_those_computed() {
    let ramp = format!("{}\n", segment("nitrogen", "[200.0, 2000.0]", "20.0", "120.0").replace("60.0\nf", "1200.0\nf"));
    let simulated = run(&ramp).unwrap();
    assert!(simulated.rows.len() == 120 && simulated.interpolation_error < 1e-5);
    let middle = &simulated.rows[61];
    let drop = middle.readings[0].unwrap();
    let alone = run(&segment("nitrogen", &format!("{drop:?}"), "20.0", "120.0")).unwrap();
    assert!((middle.mass_flow / alone.rows[0].mass_flow - 1.0).abs() < 1e-5);
}

#[test]
fn a_flow_is_met() {
    let by_flow = segment("air", "1.0", "20.0", "120.0").replace("pressure_drop_Pa = 1.0", "flow_L_min = [1.0, 4.0]");
    let simulated = run(&by_flow).unwrap();
    assert!((simulated.rows[0].volume_flow * 60e3 - 1.0).abs() < 1e-6);
    assert!((simulated.rows[5].volume_flow * 60e3 - 4.0).abs() < 1e-5);
}

#[test]
fn what_cannot_be_is_refused_with_its_reason() {
    for (fluid, drop, celsius, kpa, reason) in [
        ("nitrogen", "100.0", "20.0", "-5.0", "no absolute pressure is below 0"),
        ("nitrogen", "200000.0", "20.0", "120.0", "vacuum at the outlet"),
        ("nitrogen", "100.0", "-300.0", "120.0", "below absolute zero"),
        ("propane", "100.0", "20.0", "900.0", "propane condenses"),
        ("sulfur-hexafluoride", "100.0", "0.0", "1500.0", "condenses"),
        ("water", "100.0", "-5.0", "120.0", "water is ice"),
        ("water", "90000.0", "60.0", "100.0", "water boils"),
        ("helium", "100.0", "20.0", "30000.0", "outside the table"),
    ] {
        let message = run(&segment(fluid, drop, celsius, kpa)).unwrap_err();
        assert!(message.contains(reason) && message.contains("scenario.toml:"), "{message}");
    }
    let wide = segment("nitrogen", "90000.0", "20.0", "120.0");
    let wide = format!("[bundle]\nbore_factor = 2.0\n{wide}");
    let message = run(&wide).unwrap_err();
    assert!(message.contains("Mach"), "{message}");
    let damp = format!("{}relative_humidity_pct = 95.0\n", segment("air", "100.0", "[30.0, 20.0]", "100.0"));
    assert!(run(&damp).unwrap_err().contains("water condenses"));
}
