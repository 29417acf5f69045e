//! Sizing, planning, prediction and fluid tables: the `evenbore` binary as a user meets it, and the functions behind it.

use evenbore::double::Conditions;
use evenbore::fluid::catalogue;
use evenbore::reading::SensorUncertainty;
use evenbore::{Meter, Status};
use evenbore_bench::calibrate::fit::fit;
use evenbore_bench::calibrate::samples::Sample;
use evenbore_bench::input::element_file::ElementFile;
use evenbore_bench::planning::bench::Bench;
use evenbore_bench::planning::planner::plan;
use evenbore_bench::planning::schedule::{Counting, Goal};
use evenbore_bench::planning::sizing::shortlist;
use evenbore_bench::planning::state::State;
use evenbore_bench::planning::task::{Shapes, Task};
use evenbore_bench::record_file;
use evenbore_bench::resources::elements::nominal;
use serde_json::Value;
use std::error::Error;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};
use tempfile::TempDir;

type Outcome = Result<(), Box<dyn Error>>;

const WORKSHOP: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/../../examples/workshop");

/// A folder with the workshop's files in it.
fn workshop() -> Result<TempDir, Box<dyn Error>> {
    let folder = tempfile::tempdir()?;
    for name in ["bench-nitrogen.csv", "element.toml", "process-gas.csv"] {
        fs::copy(Path::new(WORKSHOP).join(name), folder.path().join(name))?;
    }
    Ok(folder)
}

fn run(folder: &TempDir, line: &str) -> Result<Output, Box<dyn Error>> {
    let mut command = Command::new(env!("CARGO_BIN_EXE_evenbore"));
    Ok(command.current_dir(folder.path()).args(line.split_whitespace()).output()?)
}

/// Runs a command that must succeed, and returns what it printed.
fn good(folder: &TempDir, line: &str) -> Result<String, Box<dyn Error>> {
    let output = run(folder, line)?;
    let complaint = String::from_utf8_lossy(&output.stderr).into_owned();
    assert!(output.status.success(), "{line}: {complaint}");
    Ok(String::from_utf8(output.stdout)?)
}

/// Runs a command that must be refused as bad input, and returns its complaint.
fn bad(folder: &TempDir, line: &str) -> Result<String, Box<dyn Error>> {
    let output = run(folder, line)?;
    assert_eq!(output.status.code(), Some(2), "{line}");
    Ok(String::from_utf8(output.stderr)?)
}

/// No line of a text is wider than a terminal of 60 columns.
fn readable(text: &str) {
    for line in text.lines() {
        assert!(line.chars().count() <= 60, "{} columns: {line}", line.chars().count());
    }
}

fn task<'a>(name: &str, litres_per_minute: f64, range: [f64; 2]) -> Task<'a> {
    Task {
        fluid: catalogue::find(name).map(|entry| entry.fluid()).expect("a fluid of the catalogue"),
        flow: litres_per_minute / 6e4,
        pressure_drop: 2000.0,
        range: range.map(|t| t + 273.15),
        line_pressure: 120e3,
        shapes: Shapes { tubes: true, plates: true },
        sensors: SensorUncertainty::COMMON,
        u_common: 0.0015,
        u_fit: 0.0005,
        most_channels: 2000,
    }
}

/// Flows (L/min), fluids and temperature ranges (C) to size for.
const TASKS: [(&str, f64, [f64; 2]); 6] = [
    ("air", 20.0, [20.0, 20.0]),
    ("air", 300.0, [10.0, 40.0]),
    ("helium", 2.0, [0.0, 50.0]),
    ("nitrogen", 0.02, [20.0, 20.0]),
    ("carbon-dioxide", 100.0, [15.0, 30.0]),
    ("water", 0.1, [5.0, 40.0]),
];

#[test]
fn sized_elements_reach_their_full_scale() -> Outcome {
    for (name, flow, range) in TASKS {
        let task = task(name, flow, range);
        let list = shortlist(&task);
        assert!(!list.designs.is_empty(), "{name} {flow}: {:?}", list.rejected);
        assert_eq!(list.candidates, list.accepted + list.rejected.values().sum::<usize>());
        for design in &list.designs {
            let element = nominal(&design.file)?;
            // The temperature that needs most pressure drop carries the least flow.
            let flows = task.temperatures().into_iter().map(|t| {
                Ok(Conditions::new(&element, task.fluid, t, task.line_pressure, None)?.flow(task.pressure_drop)?.volume)
            });
            let flows = flows.collect::<Result<Vec<f64>, Box<dyn Error>>>()?;
            let least = flows.into_iter().fold(f64::INFINITY, f64::min);
            assert!((least / task.flow - 1.0).abs() < 0.01, "{name}: {design:?} carries {least}");
        }
    }
    Ok(())
}

#[test]
fn no_design_is_flagged_at_full_scale() -> Outcome {
    for (name, flow, range) in TASKS {
        let task = task(name, flow, range);
        for design in shortlist(&task).designs {
            assert!(design.reynolds <= 1800.0 && design.length_over_diameter >= 50.0, "{design:?}");
            let meter = Meter::nominal(nominal(&design.file)?, task.fluid)?;
            for t in task.temperatures() {
                let state = State::dry(t, task.line_pressure);
                let law = state.law(meter.element(), task.fluid)?;
                let drop = law.pressure_drop(task.flow * law.line_density())?;
                let flow = meter.flow(&state.reading(drop))?;
                assert!(!flow.status.intersects(Status::NOT_LAMINAR | Status::STRONG_EXPANSION), "{design:?}");
            }
        }
    }
    Ok(())
}

#[test]
fn a_sized_element_is_an_element_file() -> Outcome {
    let folder = workshop()?;
    let line = "size --fluid air --full-scale 20L_min --temperature 10C..40C --line-pressure 120kPa";
    let text = good(&folder, &format!("{line} --pick 2 --element-out picked.toml"))?;
    readable(&text);
    let json: Value = serde_json::from_str(&good(&folder, &format!("{line} --json"))?)?;
    let file = ElementFile::open(folder.path().join("picked.toml"))?;
    assert_eq!(json["designs"][1]["count"], u64::from(file.count));
    assert_eq!(json["designs"][1]["length_mm"], file.length_mm);
    assert!(json["rejected"].as_array().is_some_and(|rejected| !rejected.is_empty()));
    fs::write(folder.path().join("one.csv"), "pressure_drop_Pa,temperature_C,line_pressure_kPa\n2000,40,120\n")?;
    let flows = good(&folder, "flow one.csv --element picked.toml --fluid air")?;
    assert!(flows.contains("uncalibrated"), "{flows}");
    Ok(())
}

#[test]
fn sizing_says_why_nothing_serves() -> Outcome {
    let folder = workshop()?;
    let words = bad(&folder, "size --fluid air --full-scale 900m3_h --shape round-tubes")?;
    assert!(words.contains("no design of") && words.contains("more channels than"), "{words}");
    let words = bad(&folder, "size --fluid water --full-scale 1L_min --temperature -10C")?;
    assert!(words.contains("water is stored for"), "{words}");
    let words = bad(&folder, "size --fluid air --full-scale 20L_min --most 1 --pick 3")?;
    assert!(words.contains("--pick 3: the list has 2"), "{words}");
    let words = bad(&folder, "size --fluid air --full-scale 20L_min --temperature 40C..10C")?;
    assert!(words.contains("lower end comes first"), "{words}");
    Ok(())
}

/// The workshop's record.
fn calibrated() -> Result<TempDir, Box<dyn Error>> {
    let folder = workshop()?;
    good(&folder, "calibrate bench-nitrogen.csv --element element.toml --out cal")?;
    Ok(folder)
}

/// What a prediction is asked for: fluid, state, and the columns that say so to `flow`.
const PLACES: [&str; 4] = [
    "--fluid nitrogen --temperature 60C --line-pressure 150kPa",
    "--fluid helium --temperature 40C --line-pressure 80kPa",
    "--fluid air --temperature 35.7C --line-pressure 118.03kPa --relative-humidity 50pct",
    "--fluid argon --temperature 71F --line-pressure 1.2bar --points 30",
];

#[test]
fn a_prediction_is_what_flow_says_to_the_bit() -> Outcome {
    let folder = calibrated()?;
    for place in PLACES {
        let text = good(&folder, &format!("predict --record cal/record.toml {place} --out there"))?;
        readable(&text);
        let mut table = csv::Reader::from_path(folder.path().join("there/prediction.csv"))?;
        let header = table.headers()?.clone();
        let first_result = header.iter().position(|name| name.starts_with("volume_flow")).unwrap_or(0);
        let mut readings = csv::Writer::from_path(folder.path().join("readings.csv"))?;
        readings.write_record(header.iter().take(first_result))?;
        let rows = table.records().collect::<Result<Vec<_>, _>>()?;
        for row in &rows {
            readings.write_record(row.iter().take(first_result))?;
        }
        readings.flush()?;
        let fluid = place.split_whitespace().nth(1).unwrap_or_default();
        good(&folder, &format!("flow readings.csv --record cal/record.toml --fluid {fluid} --out flows.csv"))?;
        let mut flows = csv::Reader::from_path(folder.path().join("flows.csv"))?;
        let columns = flows.headers()?.len();
        assert_eq!(flows.headers()?.iter().collect::<Vec<_>>(), header.iter().take(columns).collect::<Vec<_>>());
        for (flow, row) in flows.records().zip(&rows) {
            assert_eq!(flow?.iter().collect::<Vec<_>>(), row.iter().take(columns).collect::<Vec<_>>(), "{place}");
        }
    }
    Ok(())
}

#[test]
fn the_budget_adds_up_to_the_instruments_statement() -> Outcome {
    let folder = calibrated()?;
    let record = record_file::open(&folder.path().join("cal/record.toml"))?;
    for place in PLACES {
        let json: Value =
            serde_json::from_str(&good(&folder, &format!("predict --record cal/record.toml {place} --json"))?)?;
        let fluid = catalogue::find(json["fluid"].as_str().unwrap_or_default()).ok_or("no such fluid")?.fluid();
        let number = |value: &Value| value.as_f64().unwrap_or(f64::NAN);
        let state = State {
            temperature: number(&json["temperature_K"]),
            line_pressure: number(&json["line_pressure_Pa"]),
            humidity: json["relative_humidity"].as_f64(),
        };
        let meter = record.meter()?.with_fluid(fluid)?;
        for budget in json["budgets"].as_array().ok_or("no budgets")? {
            let stated = meter.flow(&state.reading(number(&budget["pressure_drop_Pa"])))?.uncertainty.combined();
            let sources = budget["sources"].as_array().ok_or("no sources")?;
            let squares: f64 = sources.iter().map(|row| number(&row["contribution"]).powi(2)).sum();
            assert!((squares.sqrt() / f64::from(stated) - 1.0).abs() < 5e-3, "{place}: {budget}");
            let shares: f64 = sources.iter().map(|row| number(&row["share_pct"])).sum();
            assert!((shares - 100.0).abs() < 1e-6);
            let largest = sources.iter().max_by(|p, q| number(&p["share_pct"]).total_cmp(&number(&q["share_pct"])));
            let name = largest.and_then(|row| row["source"].as_str()).unwrap_or("none");
            assert!(budget["dominant"].as_str().is_some_and(|words| words.starts_with(name)), "{budget}");
        }
    }
    Ok(())
}

#[test]
fn a_prediction_out_of_reach_is_explained() -> Outcome {
    let folder = calibrated()?;
    let words =
        bad(&folder, "predict --record cal/record.toml --fluid helium --line-pressure 80kPa --pressure-drop 90kPa")?;
    assert!(words.contains("outlet-vacuum"), "{words}");
    let words = bad(&folder, "predict --record cal/record.toml --fluid helium --temperature 400C")?;
    assert!(words.contains("helium is stored for"), "{words}");
    let words = bad(&folder, "predict --record cal/record.toml --fluid phlogiston")?;
    assert!(words.contains("no fluid is called"), "{words}");
    Ok(())
}

/// Normal deviates from a small congruential generator (Knuth's MMIX constants) by Box and Muller.
struct Draw(u64);

impl Draw {
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        ((self.0 >> 11) as f64 + 0.5) / (1u64 << 53) as f64
    }

    fn normal(&mut self) -> f64 {
        (-2.0 * self.uniform().ln()).sqrt() * (2.0 * std::f64::consts::PI * self.uniform()).cos()
    }
}

#[test]
fn simulated_runs_scatter_as_the_plan_states() -> Outcome {
    let element = nominal(&ElementFile::open(Path::new(WORKSHOP).join("element.toml"))?)?;
    let bench = Bench {
        element: &element,
        fluid: catalogue::NITROGEN.fluid(),
        state: State::dry(293.15, 118e3),
        sensors: SensorUncertainty { pressure_drop_pa: 0.2, pressure_drop_rel: 5e-4, ..SensorUncertainty::COMMON },
        u_reference: 0.001,
        u_reference_common: 0.001,
    };
    let goal = Goal { target: 0.0036, over: [0.1, 1.0], full_scale: 2500.0, counting: Counting::Flow, most_points: 40 };
    let plan = plan(&bench, &goal)?;
    assert!(plan.worst <= goal.target && plan.points() >= 8);
    let law = bench.state.law(&element, bench.fluid)?;
    let mut draw = Draw(20_261_201);
    let mut flows: Vec<Vec<f64>> = vec![Vec::new(); plan.reached.len()];
    for _ in 0..300 {
        let samples = plan.sequence().into_iter().map(|drop| {
            let errors = bench.uncertainties(drop).map(|u| u * draw.normal());
            bench.sample(0, drop, errors)
        });
        let samples = samples.collect::<Result<Vec<Sample>, _>>()?;
        let fitted = fit(&samples, 0.0, None)?;
        let drawn = element.with_coefficients(fitted.a as f32, fitted.b as f32)?;
        let drawn = bench.state.law(&drawn, bench.fluid)?;
        for (flows, reached) in flows.iter_mut().zip(&plan.reached) {
            flows.push(drawn.flow(reached.pressure_drop)?.volume / law.flow(reached.pressure_drop)?.volume - 1.0);
        }
    }
    for (flows, reached) in flows.iter().zip(&plan.reached) {
        let mean = flows.iter().sum::<f64>() / flows.len() as f64;
        let variance = flows.iter().map(|e| (e - mean).powi(2)).sum::<f64>() / (flows.len() - 1) as f64;
        let ratio = variance.sqrt() / reached.fit;
        assert!((ratio - 1.0).abs() < 0.15, "at {}: scatter {ratio} times the stated type A", reached.share);
    }
    Ok(())
}

#[test]
fn a_plan_needs_fewer_points_for_a_wider_target() -> Outcome {
    let folder = workshop()?;
    let mut before = usize::MAX;
    for target in ["0.42pct", "0.45pct", "0.6pct"] {
        let line = format!("plan --element element.toml --fluid nitrogen --target {target} --json");
        let json: Value = serde_json::from_str(&good(&folder, &line)?)?;
        let points = json["points"].as_u64().ok_or("no points")? as usize;
        assert!(points <= before && points >= 8, "{target}: {points}");
        assert!(json["worst_expanded"].as_f64() <= json["target"].as_f64());
        before = points;
    }
    assert_eq!(before, 8);
    Ok(())
}

#[test]
fn a_plan_is_a_points_file_to_fill_in() -> Outcome {
    let folder = workshop()?;
    let text = good(
        &folder,
        "plan --element element.toml --fluid nitrogen --target 0.6pct --line-pressure 118kPa --out plan.csv",
    )?;
    readable(&text);
    let skeleton = fs::read_to_string(folder.path().join("plan.csv"))?;
    let words = bad(&folder, "calibrate plan.csv --element element.toml --out cal")?;
    assert!(words.contains("empty"), "{words}");
    // Set values taken for measured ones make a run that is accepted.
    let filled = skeleton.lines().map(|line| match line.split(',').collect::<Vec<_>>().as_slice() {
        [set, flow, "nitrogen", ..] => {
            line.replacen("nitrogen,,,,,,", &format!("nitrogen,{set},20,118,{flow},20,118"), 1)
        }
        _ => line.to_owned(),
    });
    fs::write(folder.path().join("run.csv"), filled.collect::<Vec<_>>().join("\n"))?;
    let text = good(&folder, "calibrate run.csv --element element.toml --out cal")?;
    assert!(text.contains("run accepted"), "{text}");
    Ok(())
}

#[test]
fn an_impossible_target_is_explained() -> Outcome {
    let folder = workshop()?;
    let words = bad(&folder, "plan --element element.toml --fluid nitrogen --target 0.2pct")?;
    assert!(words.contains("what all points share alone gives 0.300 %"), "{words}");
    assert!(words.contains("reference flow of the calibration"), "{words}");
    let words = bad(
        &folder,
        "plan --element element.toml --fluid nitrogen --target 0.31pct --u-reference-flow-common 0.01pct --u-pressure-drop 5Pa",
    )?;
    assert!(words.contains("pressure-drop sensor"), "{words}");
    let words = bad(
        &folder,
        "plan --element element.toml --fluid nitrogen --target 0.42pct --max-points 8 --u-reference-flow 0.3pct",
    )?;
    assert!(words.contains("--max-points"), "{words}");
    let words =
        bad(&folder, "plan --element element.toml --fluid nitrogen --target 1pct --full-scale-pressure-drop 60kPa")?;
    assert!(words.contains("the law holds to 1800"), "{words}");
    Ok(())
}

/// Path of a file in a folder.
fn path(folder: &TempDir, name: &str) -> PathBuf {
    folder.path().join(name)
}

#[test]
fn a_built_table_serves() -> Outcome {
    let folder = workshop()?;
    let line =
        "fluid build process-gas.csv --name welding-gas --phase gas --molar-mass 40.68g_mol --u-viscosity 0.4pct";
    readable(&good(&folder, &format!("{line} --out fluids.toml"))?);
    let json: Value = serde_json::from_str(&good(&folder, &format!("{line} --json"))?)?;
    assert!(json["residual_viscosity"]["ppm"].as_f64().is_some_and(|ppm| ppm.abs() < 100.0), "{json}");
    let shown = good(&folder, "fluid show welding-gas --fluids fluids.toml --plot curve.svg --json")?;
    let shown: Value = serde_json::from_str(&shown)?;
    assert!(shown["viscosity_Pa_s"].as_f64().is_some_and(|mu| (2.0e-5..2.5e-5).contains(&mu)), "{shown}");
    let svg = fs::read_to_string(path(&folder, "curve.svg"))?;
    assert!(svg.starts_with("<svg xmlns=") && svg.contains("welding-gas at 101.325 kPa") && svg.ends_with("</svg>"));
    Ok(())
}

#[test]
fn a_bumpy_table_is_refused_until_the_limit_allows_it() -> Outcome {
    let folder = workshop()?;
    // Steps closer than the 32 segments of a table, one of them bumpy.
    let rows = (0..200).map(|i| {
        let bump = if i == 101 { 1.0012 } else { 1.0 };
        format!("{},{:.6},{:.3}\n", 10.0 + 0.3 * f64::from(i), bump * 2.0 * (-0.02 * f64::from(i)).exp(), 1000.0)
    });
    let text = format!("temperature_C,viscosity_mPa_s,density_kg_m3\n{}", rows.collect::<String>());
    fs::write(path(&folder, "brine.csv"), text)?;
    let words = bad(&folder, "fluid build brine.csv --name brine")?;
    assert!(words.contains("brine.csv:103") && words.contains("limit 1000 ppm"), "{words}");
    good(&folder, "fluid build brine.csv --name brine --limit 0.2pct --out brine.toml")?;
    good(&folder, "fluid show brine --fluids brine.toml")?;
    let words = bad(&folder, "fluid build brine.csv --name brine --limit 0.1pct --molar-mass 18g_mol")?;
    assert!(words.contains("--phase gas"), "{words}");
    let words = bad(&folder, "fluid build brine.csv --name water")?;
    assert!(words.contains("catalogue"), "{words}");
    let words = bad(&folder, "fluid build process-gas.csv --name pg --phase gas --molar-mass 30g_mol")?;
    assert!(words.contains("compressibility"), "{words}");
    Ok(())
}
