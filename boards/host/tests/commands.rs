//! The `evenbore` command as a user meets it: the real binary on the workshop's files, and on files gone wrong.

use evenbore_bench::record_file;
use serde_json::Value;
use std::{
    collections::BTreeSet,
    error::Error,
    fs,
    io::Write,
    path::{Path, PathBuf},
    process::{Command, Output, Stdio},
};
use tempfile::TempDir;

type Outcome = Result<(), Box<dyn Error>>;

const WORKSHOP: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/../../examples/workshop");

/// A folder of its own with the workshop's files in it.
struct Bench {
    folder: TempDir,
}

impl Bench {
    fn new() -> Result<Self, Box<dyn Error>> {
        let folder = tempfile::tempdir()?;
        for entry in fs::read_dir(WORKSHOP)? {
            let path = entry?.path();
            if path.is_file() {
                fs::copy(&path, folder.path().join(path.file_name().unwrap_or_default()))?;
            }
        }
        Ok(Self { folder })
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    fn read(&self, name: &str) -> Result<String, Box<dyn Error>> {
        Ok(fs::read_to_string(self.path(name))?)
    }

    fn write(&self, name: &str, text: impl AsRef<[u8]>) -> Outcome {
        Ok(fs::write(self.path(name), text)?)
    }

    fn command(&self, line: &str) -> Command {
        let mut command = Command::new(env!("CARGO_BIN_EXE_evenbore"));
        command.current_dir(self.folder.path()).args(line.split_whitespace().map(|word| word.replace('~', " ")));
        command
    }

    /// Runs a command line; `~` stands for a blank within a word.
    fn run(&self, line: &str) -> Result<Output, Box<dyn Error>> {
        Ok(self.command(line).stdin(Stdio::null()).output()?)
    }

    /// Runs a command line on standard input; a reader that stops early is no error here.
    fn feed(&self, line: &str, input: &str) -> Result<Output, Box<dyn Error>> {
        let mut child =
            self.command(line).stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::piped()).spawn()?;
        let mut stdin = child.stdin.take().ok_or("no standard input")?;
        let text = input.to_owned();
        let writer = std::thread::spawn(move || stdin.write_all(text.as_bytes()));
        let output = child.wait_with_output()?;
        let _ = writer.join();
        Ok(output)
    }

    /// Calibrates with `points`, and gives the exit code and calibration.json.
    fn calibrate(&self, points: &str, more: &str) -> Result<(Option<i32>, Value), Box<dyn Error>> {
        let line = format!("calibrate {points} --element element.toml --out out --date 2026-12-01 {more}");
        let output = self.run(&line)?;
        let text = self.read("out/calibration.json").map_err(|_| err(&output))?;
        Ok((output.status.code(), serde_json::from_str(&text)?))
    }
}

fn out(output: &Output) -> String {
    String::from_utf8_lossy(&output.stdout).into_owned()
}

fn err(output: &Output) -> String {
    String::from_utf8_lossy(&output.stderr).into_owned()
}

fn assert_holds(text: &str, parts: &[&str]) {
    for part in parts {
        assert!(text.contains(part), "{part:?} is not in: {text}");
    }
}

/// A table that a test may doctor.
#[derive(Clone)]
struct Sheet {
    header: Vec<String>,
    rows: Vec<Vec<String>>,
}

impl Sheet {
    fn of(text: &str) -> Self {
        let split = |line: &str| line.split(',').map(str::to_owned).collect();
        let mut lines = text.lines().filter(|line| !line.starts_with('#'));
        Self { header: split(lines.next().unwrap_or_default()), rows: lines.map(split).collect() }
    }

    fn bench() -> Result<Self, Box<dyn Error>> {
        Ok(Self::of(&fs::read_to_string(format!("{WORKSHOP}/bench-nitrogen.csv"))?))
    }

    fn column(&self, name: &str) -> usize {
        self.header.iter().position(|header| header == name).unwrap_or_else(|| panic!("no column {name}"))
    }

    fn number(&self, row: usize, name: &str) -> f64 {
        self.rows[row][self.column(name)].parse().unwrap_or(f64::NAN)
    }

    fn texts(&self, name: &str) -> Vec<&str> {
        let column = self.column(name);
        self.rows.iter().map(|row| row[column].as_str()).collect()
    }

    /// Sets a column of every row to what a function makes of row number and old value.
    fn change(mut self, name: &str, to: impl Fn(usize, f64) -> f64) -> Self {
        let column = self.column(name);
        for (i, row) in self.rows.iter_mut().enumerate() {
            row[column] = format!("{:.8}", to(i, row[column].parse().unwrap_or(f64::NAN)));
        }
        self
    }

    fn set(mut self, name: &str, to: &str) -> Self {
        let column = self.column(name);
        self.rows.iter_mut().for_each(|row| row[column] = to.into());
        self
    }

    fn keep(mut self, mut wanted: impl FnMut(&Self, usize) -> bool) -> Self {
        let whole = self.clone();
        self.rows = (0..whole.rows.len()).filter(|&i| wanted(&whole, i)).map(|i| whole.rows[i].clone()).collect();
        self
    }

    fn without_columns(mut self, unwanted: impl Fn(&str) -> bool) -> Self {
        let kept: Vec<usize> = (0..self.header.len()).filter(|&i| !unwanted(&self.header[i])).collect();
        let pick = |row: &Vec<String>| kept.iter().map(|&i| row[i].clone()).collect::<Vec<_>>();
        self.rows = self.rows.iter().map(pick).collect();
        self.header = pick(&self.header);
        self
    }

    fn text(&self) -> String {
        std::iter::once(&self.header).chain(&self.rows).map(|row| row.join(",") + "\n").collect()
    }
}

const DROP: &str = "pressure_drop_Pa";
const FLOW: &str = "reference_flow_L_min";

#[test]
fn demo_is_accepted_and_writes_what_is_promised() -> Outcome {
    let bench = Bench::new()?;
    let (code, found) = bench.calibrate("bench-nitrogen.csv", "")?;
    assert_eq!(code, Some(0));
    let names: BTreeSet<String> = fs::read_dir(bench.path("out"))?
        .map(|entry| entry.map(|entry| entry.file_name().to_string_lossy().into_owned()))
        .collect::<Result<_, _>>()?;
    assert_eq!(names.into_iter().collect::<Vec<_>>(), ["calibration.json", "record.bin", "record.toml", "report.html"]);
    let promised = "serial fluid points points_used a b u_a u_b correlation_ab common b_from_prior chi_squared \
                    degrees_of_freedom p_value accepted findings geometry range uncertainty residuals";
    for key in promised.split_whitespace() {
        assert!(found.get(key).is_some(), "{key} is missing");
    }
    let p = found["p_value"].as_f64().ok_or("p_value")?;
    assert!((0.05..0.95).contains(&p), "p = {p}");
    assert_eq!((&found["accepted"], &found["findings"]), (&Value::Bool(true), &Value::Array(vec![])));
    // Bores 0.6 % larger with 2 % spread: the sum of the fourth powers grows by 2.66 %.
    let a_ratio = found["geometry"]["a_ratio"].as_f64().ok_or("a_ratio")?;
    assert!((a_ratio - 1.0 / 1.0266).abs() < 0.008, "{a_ratio}");
    let [text, bytes] = ["out/record.toml", "out/record.bin"].map(|name| record_file::open(&bench.path(name)));
    assert_eq!(text?, bytes?);
    Ok(())
}

#[test]
fn same_inputs_give_the_same_bytes() -> Outcome {
    let bench = Bench::new()?;
    let files = ["calibration.json", "record.bin", "record.toml", "report.html"];
    let made = || -> Result<Vec<Vec<u8>>, Box<dyn Error>> {
        bench.calibrate("bench-nitrogen.csv", "")?;
        Ok(files.iter().map(|name| fs::read(bench.path("out").join(name))).collect::<Result<_, _>>()?)
    };
    assert_eq!(made()?, made()?);
    let record = fs::read(bench.path("out/record.bin"))?;
    let mut turned = Sheet::bench()?;
    turned.rows.reverse();
    turned.rows.swap(2, 9);
    bench.write("turned.csv", turned.text())?;
    bench.calibrate("turned.csv", "")?;
    assert_eq!(record, fs::read(bench.path("out/record.bin"))?, "the order of the points matters");
    Ok(())
}

#[test]
fn the_day_is_measured_within_its_uncertainty() -> Outcome {
    let bench = Bench::new()?;
    bench.calibrate("bench-nitrogen.csv", "")?;
    let output = bench.run("flow day-air-helium.csv --record out/record.toml --out flows.csv --json")?;
    assert_eq!(output.status.code(), Some(0), "{}", err(&output));
    let summary: Value = serde_json::from_str(&out(&output))?;
    assert_eq!([&summary["readings"], &summary["good"], &summary["refused"]], [60, 58, 2]);
    let flows = Sheet::of(&bench.read("flows.csv")?);
    let added = [
        "volume_flow_L_min",
        "mass_flow_g_min",
        "standard_flow_L_min",
        "reynolds",
        "u_volume_flow_rel",
        "u_mass_flow_rel",
        "u_standard_flow_rel",
        "status",
    ];
    assert_eq!(flows.header[7..], added);
    for (i, status) in flows.texts("status").into_iter().enumerate() {
        if status == "good" {
            let (read, made) = (flows.number(i, "mass_flow_g_min"), flows.number(i, "made_flow_g_min"));
            // Density at the line is good to 0.1 % beside the volume flow; at no flow the zero of 0.2 Pa counts.
            let u = flows.number(i, "u_volume_flow_rel") + 0.001;
            assert!((read - made).abs() < 2.0 * u * read.abs().max(0.0007), "row {i}: {read} instead of {made}, u {u}");
            assert!((read < 0.0) == (flows.number(i, DROP) < 0.0));
        } else {
            assert!(flows.rows[i][7..12].iter().all(String::is_empty), "row {i}");
        }
    }
    assert_eq!(flows.texts("status")[15], "temperature-outside-table");
    assert_eq!(flows.texts("status")[47], "not-finite");
    Ok(())
}

#[test]
fn both_forms_of_the_record_and_standard_streams_agree() -> Outcome {
    let bench = Bench::new()?;
    bench.calibrate("bench-nitrogen.csv", "")?;
    let day = bench.read("day-air-helium.csv")?;
    let from_bytes = bench.run("flow day-air-helium.csv --record out/record.bin")?;
    let piped = bench.feed("flow - --record out/record.toml --out -", &day)?;
    assert!(piped.status.success() && out(&piped) == out(&from_bytes));
    assert_holds(&err(&piped), &["60 readings: 58 good, 1 not-finite, 1 temperature-outside-table"]);
    let points = bench.read("bench-nitrogen.csv")?;
    let line = "calibrate - --element element.toml --out piped --date 2026-12-01 --json";
    let calibrated = bench.feed(line, &points)?;
    let found: Value = serde_json::from_str(&out(&calibrated))?;
    assert_eq!(found["points_file"], "standard input");
    assert_eq!(fs::read(bench.path("out/record.bin"))?, fs::read(bench.path("piped/record.bin"))?);
    Ok(())
}

#[test]
fn units_and_reference_conditions_are_those_asked_for() -> Outcome {
    let bench = Bench::new()?;
    bench.calibrate("bench-nitrogen.csv", "")?;
    let row = "pressure_drop_Pa,temperature_C,line_pressure_kPa\n1500,20,101.325\n";
    let flows = |more: &str| -> Result<Sheet, Box<dyn Error>> {
        Ok(Sheet::of(&out(&bench.feed(&format!("flow - --record out/record.toml {more}"), row)?)))
    };
    let si = flows("--flow-unit m3_s --reference-conditions 20C,101.325kPa")?;
    assert_eq!(si.header[3..6], ["volume_flow_m3_s", "mass_flow_kg_s", "standard_flow_m3_s"]);
    let ratio = si.number(0, "standard_flow_m3_s") / si.number(0, "volume_flow_m3_s");
    assert!((ratio - 1.0).abs() < 1e-6, "{ratio}");
    let litres = flows("")?;
    assert!((litres.number(0, "volume_flow_L_min") / si.number(0, "volume_flow_m3_s") / 6e4 - 1.0).abs() < 1e-6);
    let nominal = Sheet::of(&out(&bench.feed("flow - --element element.toml --fluid nitrogen", row)?));
    assert_eq!(nominal.texts("status"), ["uncalibrated"]);
    Ok(())
}

#[cfg(unix)]
#[test]
fn a_reader_that_goes_away_is_no_error() -> Outcome {
    let bench = Bench::new()?;
    let row = "1500.25,20.123,101.325,nitrogen\n";
    bench
        .write("long.csv", format!("pressure_drop_Pa,temperature_C,line_pressure_kPa,fluid\n{}", row.repeat(30_000)))?;
    let script = format!(
        "{} flow long.csv --element element.toml | head -n 2; echo ${{PIPESTATUS[0]}}",
        env!("CARGO_BIN_EXE_evenbore")
    );
    let output = Command::new("bash").current_dir(bench.folder.path()).args(["-c", &script]).output()?;
    assert!(out(&output).ends_with("\n0\n"), "{}", out(&output));
    assert!(!err(&output).contains("evenbore:"), "{}", err(&output));
    Ok(())
}

/// The workshop's files are what its script makes, where there is a Python to ask.
#[test]
fn the_workshop_is_what_its_script_makes() -> Outcome {
    let script = format!("{WORKSHOP}/make.py");
    if let Ok(output) = Command::new("python3").args(["-B", &script, "--check"]).output() {
        assert!(output.status.success(), "{}", err(&output));
    }
    Ok(())
}

/// Exit code, kinds of the findings, whether a record is there, and calibration.json.
type Judged = (Option<i32>, Vec<String>, bool, Value);

fn judged(sheet: &Sheet, more: &str) -> Result<Judged, Box<dyn Error>> {
    let bench = Bench::new()?;
    bench.write("doctored.csv", sheet.text())?;
    let (code, found) = bench.calibrate("doctored.csv", more)?;
    let list = found["findings"].as_array().ok_or("findings")?;
    for finding in list {
        let message = finding["message"].as_str().unwrap_or_default();
        assert!(message.starts_with(|c: char| c.is_uppercase()) && message.ends_with('.'), "{message}");
    }
    let kinds = list.iter().map(|finding| finding["kind"].as_str().unwrap_or_default().to_owned()).collect();
    let records = ["out/record.toml", "out/record.bin"].map(|name| bench.path(name).exists());
    assert_eq!(records[0], records[1]);
    Ok((code, kinds, records[0], found))
}

fn assert_refused(sheet: &Sheet, kind: &str) -> Result<Value, Box<dyn Error>> {
    let (code, kinds, record, found) = judged(sheet, "")?;
    assert_eq!((code, kinds.as_slice(), record), (Some(3), [kind.to_owned()].as_slice(), false), "{found}");
    assert_eq!(found["accepted"], false);
    Ok(found)
}

fn assert_remarked(sheet: &Sheet, kind: &str) -> Result<Value, Box<dyn Error>> {
    let (code, kinds, record, found) = judged(sheet, "")?;
    assert!(code == Some(0) && record && kinds.iter().any(|found| found == kind), "{code:?} {kinds:?}");
    Ok(found)
}

#[test]
fn an_outlier_is_named_and_may_be_left_out() -> Outcome {
    let sheet = Sheet::bench()?.change(FLOW, |i, flow| flow * if i == 4 { 1.01 } else { 1.0 });
    let found = assert_refused(&sheet, "outlier")?;
    assert_eq!(found["findings"][0]["points"][0], 6);
    let (code, kinds, record, found) = judged(&sheet, "--without 6")?;
    assert_eq!((code, kinds.len(), record), (Some(0), 0, true));
    assert_eq!(found["points_used"], 15);
    let row = found["residuals"].as_array().and_then(|rows| rows.iter().find(|row| row["line"] == 6)).ok_or("row")?;
    assert_eq!(row["used"], false);
    assert!(row["residual_rel"].as_f64().is_some_and(|off| (off + 0.01).abs() < 0.002), "{row}");
    Ok(())
}

#[test]
fn flow_that_is_not_laminar_is_named() -> Outcome {
    let rise = |drop: f64| {
        if drop > 2000.0 {
            1.02
        } else if drop > 1000.0 {
            1.005
        } else {
            1.0
        }
    };
    let sheet = Sheet::bench()?.change(DROP, |_, drop| drop * rise(drop));
    let found = assert_refused(&sheet, "not-laminar")?;
    assert_eq!(found["findings"][0]["points"], serde_json::json!([8, 9, 10, 11, 12]));
    let single = sheet.keep(|_, i| i < 8);
    assert_eq!(assert_refused(&single, "not-laminar")?["findings"][0]["points"], serde_json::json!([8, 9]));
    Ok(())
}

#[test]
fn a_zero_offset_is_named_with_its_size() -> Outcome {
    let found = assert_refused(&Sheet::bench()?.change(DROP, |_, drop| drop + 2.0), "zero-offset")?;
    assert_holds(&found.to_string(), &["reads +1.9"]);
    Ok(())
}

#[test]
fn scatter_beyond_what_is_stated_is_named() -> Outcome {
    // A fixed pattern without trend, 0.5 %.
    let jump = |i: usize| [1.0, -0.6, 0.3, -1.2, 0.9, -0.4, 1.1, -1.0][(i * 5) % 8] * 0.005;
    assert_refused(&Sheet::bench()?.change(FLOW, |i, flow| flow * (1.0 + jump(i))), "lack-of-fit")?;
    Ok(())
}

#[test]
fn a_wrong_fluid_is_refused_and_the_right_one_named() -> Outcome {
    // Argon is 1.27 times as viscous and 1.43 times as dense; A and B of the law then say what would be read.
    let found = assert_refused(&Sheet::bench()?.set("fluid", "argon"), "fluid-mismatch")?;
    assert_holds(&found.to_string(), &["the nearest first: nitrogen"]);
    let bench = Bench::new()?;
    let run = argon_run(&bench)?.set("fluid", "nitrogen");
    assert_holds(&assert_refused(&run, "fluid-mismatch")?.to_string(), &["the nearest first: ", "argon"]);
    Ok(())
}

/// The demo's pressure drops with the reference flows that nominal geometry gives on argon.
fn argon_run(bench: &Bench) -> Result<Sheet, Box<dyn Error>> {
    let sheet = Sheet::bench()?.set("fluid", "argon");
    bench.write("argon.csv", sheet.text())?;
    let flows = Sheet::of(&out(&bench.run("flow argon.csv --element element.toml")?));
    let at_inlet = sheet.without_columns(|name| name == "reference_temperature_C" || name == "reference_pressure_kPa");
    // A pattern of errors as large as stated, so that the fit is neither too good nor too bad.
    let error = |i: usize| [0.9, -0.7, 0.2, -1.1, 1.2, -0.5, 0.8, -0.9][(i * 5) % 8] * 0.0007;
    Ok(at_inlet.change(FLOW, |i, _| flows.number(i, "volume_flow_L_min") * (1.0 + error(i))))
}

#[test]
fn remarks_do_not_refuse() -> Outcome {
    let low = Sheet::bench()?.keep(|sheet, i| sheet.number(i, DROP) < 300.0);
    let found = assert_remarked(&low, "b-from-prior")?;
    assert_eq!(found["b_from_prior"], true);
    assert_remarked(&Sheet::bench()?.set("u_reference_flow_pct", "0.4"), "stated-uncertainty-too-large")?;
    assert_remarked(&Sheet::bench()?.keep(|_, i| i < 7), "too-few-points")?;
    assert_refused(&Sheet::bench()?.keep(|_, i| [0, 3, 5, 7].contains(&i)), "too-few-points")?;
    Ok(())
}

#[test]
fn uncertainties_of_zero_are_none() -> Outcome {
    let bare = Sheet::bench()?.without_columns(|name| name.starts_with("u_"));
    let (_, _, _, without) = judged(&bare, "")?;
    assert_eq!(without["uncertainty_basis"], "residuals");
    let top = without["uncertainty"].as_array().and_then(|rows| rows.last()).ok_or("rows")?;
    assert!(top["coverage_factor"].as_f64().is_some_and(|k| k > 2.0));
    let mut zeros = Sheet::bench()?;
    for name in zeros.header.clone().iter().filter(|name| name.starts_with("u_")) {
        zeros = zeros.set(name, "0");
    }
    let (_, _, _, zero) = judged(&zeros, "")?;
    assert_eq!((&zero["a"], &zero["u_a"]), (&without["a"], &without["u_a"]));
    Ok(())
}

#[test]
fn reverse_runs_calibrate_as_well() -> Outcome {
    let sheet = Sheet::bench()?;
    let drops: Vec<f64> = (0..16).map(|i| sheet.number(i, DROP)).collect();
    // The port marked upstream is then the outlet.
    let reverse = sheet
        .change(DROP, |_, drop| -drop)
        .change(FLOW, |_, flow| -flow)
        .change("line_pressure_kPa", |i, p| p - drops[i] / 1e3);
    let (code, kinds, _, found) = judged(&reverse, "")?;
    assert_eq!((code, kinds.len()), (Some(0), 0));
    let (_, _, _, forward) = judged(&Sheet::bench()?, "")?;
    let of = |found: &Value, key: &str| found[key].as_f64().unwrap_or(f64::NAN);
    assert!((of(&found, "a") / of(&forward, "a") - 1.0).abs() < 1e-5);
    assert!((of(&found, "u_a") / of(&forward, "u_a") - 1.0).abs() < 1e-2);
    Ok(())
}

#[test]
fn a_refused_run_is_used_only_with_a_reason_that_stays() -> Outcome {
    let bench = Bench::new()?;
    bench.write("doctored.csv", Sheet::bench()?.change(FLOW, |i, q| q * if i == 4 { 1.01 } else { 1.0 }).text())?;
    let (code, found) = bench.calibrate("doctored.csv", "--accept-anyway only~for~training")?;
    assert_eq!((code, &found["accepted"]), (Some(0), &Value::Bool(false)));
    assert_eq!(found["accepted_anyway"], "only for training");
    assert_eq!(record_file::open(&bench.path("out/record.bin"))?.reason, "only for training");
    let flows = Sheet::of(&out(&bench.run("flow day-air-helium.csv --record out/record.toml")?));
    let given: Vec<&str> =
        flows.texts("status").into_iter().filter(|s| !s.contains("outside") && *s != "not-finite").collect();
    assert!(given.len() == 58 && given.iter().all(|status| *status == "refused-run"), "{given:?}");
    let bad = bench.run("calibrate doctored.csv --element element.toml --out out --accept-anyway täglich")?;
    assert_eq!(bad.status.code(), Some(2));
    assert_holds(&err(&bad), &["printable ASCII"]);
    Ok(())
}

/// A calibration that must end with code 2, its message holding some parts, and leave nothing behind.
fn assert_bad(text: impl AsRef<[u8]>, parts: &[&str]) -> Outcome {
    let bench = Bench::new()?;
    bench.write("bad.csv", text)?;
    let output = bench.run("calibrate bad.csv --element element.toml --out out")?;
    assert_eq!(output.status.code(), Some(2), "{}{}", out(&output), err(&output));
    assert_holds(&err(&output), parts);
    assert!(!bench.path("out").exists(), "something was left behind");
    Ok(())
}

/// The bench run with one cell of its first row (line 2) replaced.
fn with_cell(name: &str, cell: &str) -> Result<String, Box<dyn Error>> {
    let mut sheet = Sheet::bench()?;
    let column = sheet.column(name);
    sheet.rows[0][column] = cell.into();
    Ok(sheet.text())
}

#[test]
fn bad_tables_are_refused_with_their_place() -> Outcome {
    let sheet = Sheet::bench()?;
    let text = sheet.text();
    assert_bad("", &["bad.csv:1: the file is empty"])?;
    assert_bad(
        sheet.clone().without_columns(|name| name == "temperature_C").text(),
        &["bad.csv:1: column temperature_<unit> is missing", "C, K, F"],
    )?;
    assert_bad(text.replacen("pressure_drop_Pa", "pressure_drop_pa", 1), &["bad.csv:1, column 1", "did you mean"])?;
    assert_bad(text.replace(',', ";").replace('.', ","), &["bad.csv:1", "semicolons"])?;
    assert_bad(with_cell("temperature_C", "\"21,6\"")?, &["bad.csv:2, column 3 (temperature_C)", "Write 21.6"])?;
    assert_bad(
        text.replacen("u_pressure_drop_Pa", "pressure_drop_kPa", 1),
        &["column 2 (pressure_drop_kPa)", "second"],
    )?;
    assert_bad(with_cell(DROP, "broken")?, &["bad.csv:2, column 1 (pressure_drop_Pa): \"broken\" is not a number"])?;
    assert_bad(with_cell(DROP, "NaN")?, &["bad.csv:2, column 1", "\"NaN\" is not a finite number"])?;
    assert_bad(with_cell(FLOW, "inf")?, &["bad.csv:2, column 8 (reference_flow_L_min)", "\"inf\""])?;
    assert_bad(with_cell(FLOW, "-0.28")?, &["bad.csv:2, column 8", "disagree in sign"])?;
    assert_bad(with_cell(FLOW, "0")?, &["bad.csv:2, column 8", "other than 0"])?;
    assert_bad(with_cell(DROP, "0")?, &["bad.csv:2", "needs a pressure drop"])?;
    assert_bad(with_cell("fluid", "argon")?, &["bad.csv:3, column 13 (fluid)", "one fluid"])?;
    assert_bad(with_cell("u_pressure_drop_Pa", "-0.1")?, &["bad.csv:2, column 2", "negative"])?;
    assert_bad(with_cell("u_pressure_drop_Pa", "200")?, &["bad.csv:2", "uncertainty of the pressure drop is 2e2 Pa"])?;
    assert_bad(with_cell(FLOW, "1e300")?, &["bad.csv:2", "that of no element"])?;
    assert_bad(with_cell("temperature_C", "295.1")?, &["bad.csv:2, column 3", "is this column in K?"])?;
    assert_bad(sheet.clone().keep(|_, i| i == 0).text(), &["1 point is used"])?;
    assert_bad(sheet.clone().keep(|_, i| [3, 12].contains(&i)).text(), &["2 points are used"])?;
    let one_flow = sheet.clone().keep(|_, i| i < 6).change(DROP, |_, _| 500.0).change(FLOW, |_, _| 1.9);
    assert_bad(one_flow.text(), &["all points lie at one flow"])?;
    assert_bad(
        sheet.clone().set("fluid", "nitrogn").text(),
        &["no fluid is called \"nitrogn\"", "did you mean nitrogen?"],
    )?;
    assert_bad(sheet.clone().without_columns(|name| name == "fluid").text(), &["no fluid", "--fluid"])?;
    assert_bad(sheet.set("line_pressure_kPa", "1.5").text(), &["bad.csv:7", "outside", "1.500 kPa", "1 to 1000 kPa"])?;
    Ok(())
}

#[test]
fn an_uncertainty_missing_for_one_point_is_refused() -> Outcome {
    let mut sheet = Sheet::bench()?;
    for name in ["u_pressure_drop_Pa", "u_temperature_K", "u_line_pressure_kPa", "u_reference_flow_pct"] {
        let column = sheet.column(name);
        sheet.rows[5][column] = String::new();
    }
    assert_bad(sheet.text(), &["bad.csv:7", "no independent uncertainty"])
}

#[test]
fn humidity_belongs_to_air() -> Outcome {
    let mut sheet = Sheet::bench()?;
    sheet.header.push("relative_humidity_pct".into());
    sheet.rows.iter_mut().for_each(|row| row.push("40".into()));
    assert_bad(sheet.text(), &["bad.csv:2", "40.0 pct beside nitrogen", "leave the cell empty"])
}

#[test]
fn harmless_habits_of_programs_are_understood() -> Outcome {
    let bench = Bench::new()?;
    bench.calibrate("bench-nitrogen.csv", "")?;
    let plain = fs::read(bench.path("out/record.bin"))?;
    bench.write("habits.csv", format!("\u{feff}{}", bench.read("bench-nitrogen.csv")?.replace('\n', "\r\n")))?;
    assert_eq!(bench.calibrate("habits.csv", "")?.0, Some(0));
    assert_eq!(plain, fs::read(bench.path("out/record.bin"))?);
    Ok(())
}

#[test]
fn damaged_records_are_refused() -> Outcome {
    let bench = Bench::new()?;
    bench.calibrate("bench-nitrogen.csv", "")?;
    let refused = |name: &str, parts: &[&str]| -> Outcome {
        let output = bench.run(&format!("flow day-air-helium.csv --record {name} --out flows.csv"))?;
        assert_eq!(output.status.code(), Some(2));
        assert_holds(&err(&output), parts);
        assert!(!bench.path("flows.csv").exists());
        Ok(())
    };
    let bytes = fs::read(bench.path("out/record.bin"))?;
    for place in [0, 5, 40, 300, 1043] {
        let mut flipped = bytes.clone();
        flipped[place] ^= 4;
        bench.write("flipped.bin", flipped)?;
        refused("flipped.bin", &["flipped.bin: "])?;
    }
    bench.write("short.bin", &bytes[..500])?;
    refused("short.bin", &["short.bin: "])?;
    let text = bench.read("out/record.toml")?;
    let a = text.lines().find(|line| line.starts_with("a = ")).ok_or("no a")?;
    bench.write("edited.toml", text.replacen(a, "a = 1.1e12", 1))?;
    refused("edited.toml", &["edited.toml: the text was edited"])?;
    bench.write("typo.toml", text.replacen("serial", "serail", 1))?;
    refused("typo.toml", &["typo.toml:"])?;
    bench.write("other.toml", "x = 1\n")?;
    refused("other.toml", &["other.toml:"])?;
    refused("element.toml", &["element.toml: not a calibration record: this looks like an element file"])?;
    refused("absent.toml", &["absent.toml: cannot open"])
}

#[test]
fn places_that_cannot_be_written_are_named() -> Outcome {
    let bench = Bench::new()?;
    bench.calibrate("bench-nitrogen.csv", "")?;
    let under = bench.run("calibrate bench-nitrogen.csv --element element.toml --out element.toml/out")?;
    assert_eq!(under.status.code(), Some(2));
    assert_holds(&err(&under), &["element.toml/out: cannot make the folder"]);
    let under = bench.run("flow day-air-helium.csv --record out/record.toml --out absent/flows.csv")?;
    assert_eq!(under.status.code(), Some(2));
    assert_holds(&err(&under), &["absent/flows.csv: cannot make a file in the folder absent"]);
    if Path::new("/dev/full").exists() {
        let full = bench.run("flow day-air-helium.csv --record out/record.toml --out /dev/full")?;
        assert_eq!(full.status.code(), Some(2));
        assert_holds(&err(&full), &["/dev/full: cannot write"]);
    }
    bench.write("late.csv", bench.read("day-air-helium.csv")?.replacen("-242.02", "cold", 1))?;
    let late = bench.run("flow late.csv --record out/record.toml --out flows.csv")?;
    assert_eq!(late.status.code(), Some(2));
    assert_holds(&err(&late), &["late.csv:20, column 3 (temperature_C): \"cold\" is not a number"]);
    for entry in fs::read_dir(bench.folder.path())? {
        let name = entry?.file_name().to_string_lossy().into_owned();
        assert!(!name.ends_with(".part") && name != "flows.csv", "{name} was left behind");
    }
    Ok(())
}

#[test]
fn fluids_are_listed_and_shown() -> Outcome {
    let bench = Bench::new()?;
    let list: Value = serde_json::from_str(&out(&bench.run("fluid list --json --fluids fluids.toml")?))?;
    let names: Vec<&str> = list.as_array().ok_or("list")?.iter().filter_map(|fluid| fluid["name"].as_str()).collect();
    assert_eq!(names[..4], ["workshop-oil", "coolant", "process-gas", "nitrogen"]);
    let shown: Value = serde_json::from_str(&out(
        &bench.run("fluid show air --temperature 25C --pressure 101.325kPa --relative-humidity 50pct --json")?
    ))?;
    for key in ["viscosity_Pa_s", "kinematic_viscosity_m2_s", "density_kg_m3", "u_viscosity_rel"] {
        assert!(shown[key].is_f64(), "{key}");
    }
    assert_eq!(shown["status"], "good");
    let hot = bench.run("fluid show nitrogen --temperature 500C --json")?;
    assert_eq!(hot.status.code(), Some(2));
    let shown: Value = serde_json::from_str(&out(&hot))?;
    assert_eq!((&shown["viscosity_Pa_s"], &shown["status"]), (&Value::Null, &"temperature-outside-table".into()));
    assert_holds(&err(&hot), &["stored for -40.00 to 150.00 C"]);
    let wrong = bench.run("fluid show helim")?;
    assert_holds(&err(&wrong), &["no fluid is called \"helim\"", "did you mean helium?"]);
    Ok(())
}

#[test]
fn a_gas_of_ones_own_follows_pressure() -> Outcome {
    let bench = Bench::new()?;
    let density = |pressure: &str| -> Result<f64, Box<dyn Error>> {
        let line =
            format!("fluid show process-gas --fluids fluids.toml --temperature 20C --pressure {pressure} --json");
        let shown: Value = serde_json::from_str(&out(&bench.run(&line)?))?;
        Ok(shown["density_kg_m3"].as_f64().ok_or("density")?)
    };
    let table = Sheet::of(&bench.read("process-gas.csv")?);
    assert!((density("101.325kPa")? / table.number(2, "density_kg_m3") - 1.0).abs() < 1e-4);
    assert!((density("202.65kPa")? / density("101.325kPa")? - 2.0).abs() < 0.01);
    let refused = |fluids: &str, parts: &[&str]| -> Outcome {
        bench.write("own.toml", fluids)?;
        let output = bench.run("fluid list --fluids own.toml")?;
        assert_eq!(output.status.code(), Some(2));
        assert_holds(&err(&output), parts);
        Ok(())
    };
    let gas = "kind = \"table\"\ndata = \"process-gas.csv\"\n";
    refused(&format!("[argon]\n{gas}"), &["own.toml: [argon]", "choose another"])?;
    refused(
        &format!("[g]\n{gas}molar_mass_g_mol = 4.0\n"),
        &["process-gas.csv:", "compressibility factor", "wrong unit"],
    )?;
    refused(&format!("[g]\n{gas}pressure_kPa = 100.0\n"), &["own.toml:4", "molar_mass_g_mol"])?;
    refused(&format!("[a-name-of-twenty-five-abcd]\n{gas}"), &["own.toml:1", "1 to 24"])?;
    let kinked = bench.read("process-gas.csv")?.replacen("50,", "49,", 1);
    let row = kinked.lines().find(|line| line.starts_with("49,")).ok_or("row")?.to_owned();
    let mut cells: Vec<String> = row.split(',').map(str::to_owned).collect();
    cells[2] = "1.6".into();
    bench.write("process-gas.csv", kinked.replacen(&row, &cells.join(","), 1))?;
    refused(&format!("[g]\n{gas}molar_mass_g_mol = 40.68\n"), &["process-gas.csv:", "stored curve", "limit 0.1 %"])
}

#[test]
fn an_oil_of_ones_own_calibrates_with_b_from_geometry() -> Outcome {
    let bench = Bench::new()?;
    let rows: String = (1..=10).map(|i| format!("{}e3,22,300\n", 5 * i)).collect();
    bench.write("oil.csv", format!("pressure_drop_Pa,temperature_C,line_pressure_kPa\n{rows}"))?;
    let flow = "flow oil.csv --element element.toml --fluid workshop-oil --fluids fluids.toml --flow-unit mL_min";
    let flows = Sheet::of(&out(&bench.run(flow)?));
    let error = |i: usize| [0.9, -0.7, 0.2, -1.1, 1.2, -0.5, 0.8, -0.9][i % 8] * 0.001;
    let points: String = (0..10)
        .map(|i| {
            let flow = flows.number(i, "volume_flow_mL_min") * (1.0 + error(i));
            format!("{},22,300,{flow},0.1,workshop-oil\n", flows.rows[i][0])
        })
        .collect();
    let header = "pressure_drop_Pa,temperature_C,line_pressure_kPa,reference_flow_mL_min,u_reference_flow_pct,fluid\n";
    bench.write("points.csv", format!("{header}{points}"))?;
    let (code, found) = bench.calibrate("points.csv", "--fluids fluids.toml")?;
    assert_eq!((code, &found["b_from_prior"]), (Some(0), &Value::Bool(true)), "{found}");
    // The record carries its fluid: no file is needed at use.
    let used = bench.run("flow oil.csv --record out/record.toml --fluid workshop-oil")?;
    assert!(used.status.success(), "{}", err(&used));
    Ok(())
}

#[test]
fn options_that_cannot_be_meant_are_named() -> Outcome {
    let bench = Bench::new()?;
    bench.calibrate("bench-nitrogen.csv", "")?;
    let refused = |more: &str, parts: &[&str]| -> Outcome {
        let output = bench.run(&format!("flow day-air-helium.csv --out flows.csv {more}"))?;
        assert_eq!(output.status.code(), Some(2), "{more}");
        assert_holds(&err(&output), parts);
        assert!(!bench.path("flows.csv").exists());
        Ok(())
    };
    refused("", &["--record <RECORD.toml>", "--element <ELEMENT.toml>"])?;
    refused("--record out/record.toml --fluid nitrogen", &["day-air-helium.csv:", "--fluid says nitrogen"])?;
    refused("--record out/record.toml --fluid phlogiston", &["evenbore: --fluid: ", "phlogiston"])?;
    refused("--record out/record.toml --u-temperature 1000K", &["evenbore: --u-temperature: ", "temperature (K)"])
}

/// A refused run leaves no record beside its report, and what cannot be written whole is not written at all.
#[test]
fn results_of_a_run_belong_together() -> Outcome {
    let bench = Bench::new()?;
    bench.calibrate("bench-nitrogen.csv", "")?;
    let (record, report) = (bench.read("out/record.toml")?, bench.read("out/report.html")?);
    bench.write("doctored.csv", Sheet::bench()?.change(FLOW, |i, q| q * if i == 4 { 1.01 } else { 1.0 }).text())?;
    fs::rename(bench.path("out/record.bin"), bench.path("kept.bin"))?;
    fs::create_dir(bench.path("out/record.bin"))?;
    let output = bench.run("calibrate bench-nitrogen.csv --element element.toml --out out")?;
    assert_eq!(output.status.code(), Some(2));
    assert_eq!(bench.read("out/report.html")?, report);
    fs::remove_dir(bench.path("out/record.bin"))?;
    fs::rename(bench.path("kept.bin"), bench.path("out/record.bin"))?;
    let output = bench.run("calibrate doctored.csv --element element.toml --out out")?;
    assert_eq!(output.status.code(), Some(3));
    assert_holds(&err(&output), &["record.toml is of an earlier run and is now", "record.bin.earlier"]);
    assert!(!bench.path("out/record.toml").exists() && !bench.path("out/record.bin").exists());
    assert_eq!(bench.read("out/record.toml.earlier")?, record);
    Ok(())
}

#[test]
fn moist_air_is_shown_with_what_its_water_adds() -> Outcome {
    let bench = Bench::new()?;
    let u = |more: &str| -> Result<f64, Box<dyn Error>> {
        let shown: Value = serde_json::from_str(&out(&bench.run(&format!("fluid show air --json {more}"))?))?;
        shown["u_viscosity_rel"].as_f64().ok_or_else(|| "no uncertainty".into())
    };
    assert!(u("--temperature 40C --relative-humidity 90pct")? > 2.0 * u("--temperature 40C")?);
    let refused = bench.run("fluid show air --temperature 80C --relative-humidity 50pct")?;
    assert_holds(&err(&refused), &["0 to 100 %", "-20 to 60 C"]);
    Ok(())
}
