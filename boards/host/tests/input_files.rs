//! Bad files: each must be refused with its file, line, column and value, and no file may bring the program down.

use std::{
    fs,
    io::{self, Read, Write},
    path::Path,
    time::Instant,
};

use evenbore_bench::{
    input::{
        element_file::{ElementFile, Shape},
        fluids_file::{self, DeclaredFluid},
        points::{Points, Reference},
        problem::Problem,
        readings::ReadingsPlan,
        table::Table,
        toml_text::TomlText,
    },
    output::{Sink, write_whole},
};
use proptest::prelude::*;

type Outcome = Result<(), Box<dyn std::error::Error>>;

const HEADER: &str = "pressure_drop_kPa,temperature_C,line_pressure_kPa,reference_flow_L_min\n";
const ELEMENT: &str = "serial = \"EB-0042\"\nshape = \"round-tubes\"\ncount = 120\nbore_mm = 0.44\nlength_mm = 120.0\n\
                       expansion_per_K = 16e-6\nreference_temperature_C = 20.0\n";

/// Reads every number of a table as readings.
fn readings(bytes: impl Into<Vec<u8>>) -> Result<Vec<f64>, Problem> {
    let mut table = Table::from_reader("bench.csv", io::Cursor::new(bytes.into()))?;
    let plan = ReadingsPlan::bind(&table)?;
    let mut drops = Vec::new();
    while let Some(row) = table.next_row()? {
        drops.push(plan.reading(&row)?.pressure_drop);
    }
    Ok(drops)
}

fn points(text: &str) -> Result<Points, Problem> {
    Points::read(Table::from_reader("bench.csv", io::Cursor::new(text.to_owned()))?)
}

fn element(text: &str) -> Result<ElementFile, Problem> {
    ElementFile::read(&TomlText::new("element.toml", text))
}

/// The message of a refusal, which must hold every one of some parts.
fn assert_refused<T>(result: Result<T, Problem>, parts: &[&str]) {
    let message = result.err().map_or_else(|| "accepted".to_owned(), |problem| problem.to_string());
    for part in parts {
        assert!(message.contains(part), "{part:?} is not in: {message}");
    }
}

#[test]
fn files_without_rows() {
    assert_refused(readings(""), &["bench.csv:1: the file is empty", "header row"]);
    assert_refused(readings("# one\n\n# two\n"), &["bench.csv:3: the file is empty"]);
    assert_refused(readings(HEADER), &["bench.csv:1: the file ends after its header"]);
}

#[test]
fn headers() {
    for (text, parts) in [
        ("temperature_C\n20\n", &["bench.csv:1:", "pressure_drop_<unit>", "line_pressure_<unit>", "kPa"][..]),
        (
            "# note\ntemperature_C,pressure_drop_torr\n",
            &["bench.csv:2, column 2 (pressure_drop_torr)", "\"torr\"", "mbar"],
        ),
        ("temperature\n20\n", &["bench.csv:1, column 1 (temperature)", "missing", "C, K, F"]),
        ("temperature_degC\n20\n", &["(temperature_degC)", "did you mean temperature_C?"]),
        ("operator,operator\n", &["bench.csv:1, column 2 (operator)", "second column"]),
        ("temperature_C,temperature_K\n", &["bench.csv:1, column 2 (temperature_K)", "second column"]),
        ("pressure_drop_kPa;temperature_C\n4,98;20,1\n", &["bench.csv:1:", "semicolons", "decimal commas"]),
        ("pressure_drop_kPa\ttemperature_C\n4.98\t20\n", &["bench.csv:1", "tabs"]),
        ("pressure_drop_kPa,temperature_C\r4.98,20\r", &["bench.csv:1:", "carriage returns"]),
        ("Pressure drop [kPa],temperature_C,line_pressure_kPa\n1,2,3\n", &["column 1 (\"Pressure drop [kPa]\")"]),
        (
            "pressure_drop_Pa,temperature_C,line_gauge_pressure_kPa\n",
            &["bench.csv:1: column barometric_pressure_<unit>"],
        ),
        (
            "pressure_drop_Pa,temperature_C,line_gauge_pressure_kPa,barometric_pressure_kPa,line_pressure_kPa\n",
            &["column 5 (line_pressure_kPa)", "give one of them"],
        ),
    ] {
        assert_refused(readings(text), parts);
    }
}

#[test]
fn numbers() {
    for (cell, parts) in [
        ("\"4,98\"", &["bench.csv:3, column 1 (pressure_drop_kPa): \"4,98\" is not a number", "Write 4.98"][..]),
        ("4.98 kPa", &["bench.csv:3, column 1", "\"4.98 kPa\"", "the unit belongs into the header"]),
        ("high", &["bench.csv:3, column 1 (pressure_drop_kPa): \"high\" is not a number"]),
        ("NaN", &["bench.csv:3, column 1 (pressure_drop_kPa): \"NaN\" is not a finite number"]),
        ("inf", &["bench.csv:3, column 1 (pressure_drop_kPa): \"inf\" is not a finite number"]),
        ("1e999", &["bench.csv:3, column 1", "\"1e999\" is not a finite number"]),
        ("1e308", &["bench.csv:3, column 1", "too large"]),
        ("", &["bench.csv:3, column 1 (pressure_drop_kPa)", "empty"]),
        ("\u{2212}4.98", &["bench.csv:3, column 1", "minus", "Write -4.98"]),
        ("\"4.98\n\"", &[]),
    ] {
        let text = format!("{HEADER}1,20,100,1\n{cell},20,100,1\n");
        if parts.is_empty() {
            assert_eq!(readings(text).map_err(|problem| problem.to_string()), Ok(vec![1000.0, 4980.0]));
        } else {
            assert_refused(readings(text), parts);
        }
    }
}

#[test]
fn rows_of_another_width() {
    assert_refused(readings(format!("{HEADER}1,20,100\n")), &["bench.csv:2: the row has 3 cells, the header has 4"]);
    let split = format!("{HEADER}# a decimal comma\n4,98,20,100,1\n");
    assert_refused(readings(split), &["bench.csv:3: the row has 5 cells, the header has 4", "decimal comma"]);
}

#[test]
fn bytes_that_are_not_text() {
    let mut bytes = HEADER.as_bytes().to_vec();
    bytes.extend_from_slice(b"1\xff,20,100,1\n");
    assert_refused(readings(bytes), &["bench.csv:2, column 1 (pressure_drop_kPa)", "UTF-8"]);
    assert_refused(readings(b"oper\xffator,temperature_C\n".to_vec()), &["bench.csv:1, column 1", "UTF-8"]);
    assert_refused(readings(b"\xff\xfep\0r\0".to_vec()), &["bench.csv:1", "UTF-16"]);
    assert_refused(readings(vec![0; 100]), &["bench.csv:1"]);
}

#[test]
fn what_spreadsheets_write_is_read() -> Outcome {
    let text = format!("\u{feff}# run 7\r\n\r\n{}1,20,100,1\r\n# pause\r\n 2 ,20,100,1", HEADER.replace('\n', "\r\n"));
    assert_eq!(readings(text)?, [1000.0, 2000.0]);
    Ok(())
}

#[test]
fn lines_are_physical() -> Outcome {
    let text =
        "# first\nnote,temperature_C\n\"two\nlines, \"\"quoted\"\"\n# inside\",20\n# between\n5\" pipe,21\nend,x\n";
    let mut table = Table::from_reader("bench.csv", text.as_bytes())?;
    let row = table.next_row()?.ok_or("a row")?;
    assert_eq!((row.line(), row.text(0)?), (3, "two\nlines, \"quoted\"\n# inside"));
    let row = table.next_row()?.ok_or("a row")?;
    assert_eq!((row.line(), row.text(0)?, row.number(1)?), (7, "5\" pipe", Some(294.15)));
    let row = table.next_row()?.ok_or("a row")?;
    assert_refused(row.number(1), &["bench.csv:8, column 2 (temperature_C): \"x\""]);
    assert!(table.next_row()?.is_none());
    Ok(())
}

#[test]
fn open_quotes_and_endless_lines() {
    assert_refused(readings(format!("{HEADER}\"1,20\n100,1\n")), &["bench.csv:2:", "never closed"]);
    let endless = |byte: u8| Table::from_reader("bench.csv", io::repeat(byte).take(100 << 20)).map(|_| ());
    assert_refused(endless(b'a'), &["bench.csv:1: the line is longer than the limit of 1048576 bytes"]);
    assert_refused(endless(b'"'), &["bench.csv:1: the line is longer"]);
    assert_refused(endless(b'#'), &["bench.csv:1: the line is longer"]);
    let blank = Table::from_reader("bench.csv", io::repeat(b'\n').take(4 << 20));
    assert_refused(blank.map(|_| ()), &["bench.csv:4194304: the file is empty"]);
}

#[test]
fn gauge_and_barometer_add_up() -> Outcome {
    let text = "pressure_drop_Pa,temperature_F,line_gauge_pressure_kPa,barometric_pressure_hPa,u_line_gauge_pressure_pct,\
                u_barometric_pressure_common_Pa,u_temperature_F,relative_humidity_pct,fluid\n\
                -5,32,30,1000,1,40,0.9,35,air\n";
    let mut table = Table::from_reader("bench.csv", text.as_bytes())?;
    let plan = ReadingsPlan::bind(&table)?;
    let row = table.next_row()?.ok_or("a row")?;
    let reading = plan.reading(&row)?;
    assert_eq!((reading.pressure_drop, reading.temperature, reading.line_pressure), (-5.0, 273.15, 130e3));
    assert_eq!((reading.relative_humidity, reading.fluid), (Some(0.35), Some("air")));
    assert_eq!((reading.u.line_pressure.independent, reading.u.line_pressure.common), (Some(300.0), Some(40.0)));
    assert_eq!((reading.u.temperature.combined(), reading.u.pressure_drop.combined()), (Some(0.5), None));
    assert!(plan.doubt(&row, &reading).is_none());
    Ok(())
}

#[test]
fn implausible_values() {
    let run = |row: &str| points(&format!("{HEADER}4.98,20,100,1\n{row}\n"));
    assert_refused(run("4.98,293.15,100,1"), &["bench.csv:3, column 2 (temperature_C): \"293.15\"", "in K?", "250 C"]);
    assert_refused(run("4.98,20,0.1,1"), &["bench.csv:3, column 3 (line_pressure_kPa): \"0.1\"", "below 1000 Pa"]);
    assert_refused(run("4.98,20,100000,1"), &["bench.csv:3, column 3", "\"100000\"", "20000000 Pa"]);
    let negative = "pressure_drop_kPa,temperature_C,line_pressure_kPa,u_temperature_K\n1,20,100,-0.1\n";
    assert_refused(readings(negative), &["bench.csv:2, column 4 (u_temperature_K): \"-0.1\" is negative"]);
}

#[test]
fn points_that_contradict_themselves() {
    let run = |row: &str| points(&format!("{HEADER}{row}\n"));
    assert_refused(
        run("4.98,20,100,-1"),
        &["bench.csv:2, column 4 (reference_flow_L_min): \"-1\"", "\"4.98\"", "sign"],
    );
    assert_refused(
        run("-4.98,20,100,1"),
        &["bench.csv:2, column 4 (reference_flow_L_min): \"1\"", "\"-4.98\"", "sign"],
    );
    assert_refused(run("4.98,20,100,0"), &["bench.csv:2, column 4 (reference_flow_L_min): \"0\" is no flow"]);
    assert_refused(run("4.98,20,100,"), &["bench.csv:2, column 4", "empty"]);
    let no_reference = "pressure_drop_kPa,temperature_C,line_pressure_kPa\n1,20,100\n";
    assert_refused(points(no_reference), &["bench.csv:1: the reference is missing", "L_min", "kg_s"]);
    let both = format!("reference_mass_flow_g_min,{HEADER}1,1,20,100,1\n");
    assert_refused(points(&both), &["bench.csv:1, column 1 (reference_mass_flow_g_min)", "give one of them"]);
    let orphan = format!("u_reference_mass_flow_pct,{HEADER}1,1,20,100,1\n");
    assert_refused(points(&orphan), &["column 1 (u_reference_mass_flow_pct)", "no reference_mass_flow column"]);
}

#[test]
fn fluids_that_disagree() {
    let text = format!("fluid,{HEADER}air,4,20,100,1\n# swap\nargon,4,20,100,1\n");
    assert_refused(points(&text), &["bench.csv:4, column 1 (fluid)", "\"argon\"", "line 2", "\"air\""]);
}

#[test]
fn points_keep_everything() -> Outcome {
    let text = "fluid,note,pressure_drop_kPa,temperature_C,line_pressure_kPa,reference_flow_L_min,reference_temperature_C,\
                reference_pressure_hPa,u_reference_flow_pct,u_reference_flow_common_pct\n\
                air,\"a, b\",-4,20,100,-60,,1000,0.5,0.2\n";
    let run = points(text)?;
    let point = &run.points[0];
    assert_eq!((run.fluid.as_deref(), run.extra_headers.as_slice()), (Some("air"), &["note".to_owned()][..]));
    assert_eq!((point.line, point.extra.as_slice()), (2, &["a, b".to_owned()][..]));
    assert_eq!((point.u_reference.independent, point.u_reference.common), (Some(5e-6), Some(2e-6)));
    let Reference::Volume { flow, temperature, pressure, .. } = point.reference else {
        return Err("a volume flow was expected".into());
    };
    assert_eq!((flow, temperature, pressure), (-1e-3, None, Some(100e3)));
    Ok(())
}

#[test]
fn element_files() {
    for (from, to, parts) in [
        ("bore_mm", "boer_mm", &["element.toml:4, column 1 (boer_mm)", "\"boer_mm\"", "did you mean bore_mm?"][..]),
        ("bore_mm = 0.44\n", "", &["element.toml:1, column 1 (bore_mm)", "missing", "0.001 to 50 mm"]),
        ("0.44", "440.0", &["element.toml:4, column 11 (bore_mm): 440 mm is outside 0.001 mm to 50 mm"]),
        ("0.44", "nan", &["element.toml:4, column 11 (bore_mm): \"nan\" is not a finite number"]),
        ("0.44", "\"0.44\"", &["element.toml:4, column 11 (bore_mm)", "is not a finite number"]),
        ("0.44", "0,44", &["element.toml:4, column 12 (bore_mm)", "decimal comma"]),
        ("120\n", "0\n", &["element.toml:3, column 9 (count): 0 is outside 1 to 1000000"]),
        ("120\n", "1.5\n", &["element.toml:3, column 9 (count): 1.5 is not a whole number"]),
        ("120\n", "99999999999999999999\n", &["element.toml:3, column 9 (count)", "99999999999999999999"]),
        ("120.0", "0.01", &["element.toml:5, column 13 (length_mm): 0.01 mm is outside 0.1 mm"]),
        (
            "round-tubes",
            "round-tube",
            &["element.toml:2, column 9 (shape): \"round-tube\"", "did you mean round-tubes?"],
        ),
        (
            "round-tubes",
            "parallel-plates",
            &["element.toml:4, column 11 (bore_mm)", "belongs to round-tubes", "gap_mm"],
        ),
        ("EB-0042", "", &["element.toml:1, column 10 (serial): \"\" (0 characters)", "16"]),
        ("EB-0042", "\u{e4}", &["element.toml:1, column 10 (serial)", "printable ASCII"]),
        ("count", "serial", &["element.toml:3, column 1 (serial)", "duplicate"]),
        ("16e-6", "[", &["element.toml:"]),
    ] {
        let text = ELEMENT.replacen(from, to, 1);
        assert_ne!(text, ELEMENT);
        assert_refused(element(&text), parts);
    }
    assert!(element(ELEMENT).is_ok());
}

#[test]
fn other_shapes() -> Outcome {
    let other = ELEMENT.replace("round-tubes", "other").replace("bore_mm = 0.44\n", "").replace("count = 120\n", "");
    assert_eq!(element(&other)?.shape, Shape::Other { hydraulic_diameter_mm: None, open_area_mm2: None });
    let half = format!("{other}open_area_mm2 = 18.0\n");
    assert_refused(element(&half), &["(open_area_mm2): stands without hydraulic_diameter_mm: give both"]);
    let both = format!("{half}hydraulic_diameter_mm = 0.4\n");
    assert_eq!(element(&both)?.shape, Shape::Other { hydraulic_diameter_mm: Some(0.4), open_area_mm2: Some(18.0) });
    let two = ELEMENT.replace("round-tubes", "parallel-plates").replace("count = 120", "count = 2");
    let two = two.replace("bore_mm = 0.44", "gap_mm = 0.2\nwidth_mm = 30");
    assert_refused(element(&two), &["element.toml:3, column 9 (count): 2 is not 1", "total width"]);
    let plates = |gap: &str| {
        let text = ELEMENT.replace("round-tubes", "parallel-plates").replace("count = 120", "count = 1");
        element(&text.replace("bore_mm = 0.44", &format!("gap_mm = {gap}\nwidth_mm = 30")))
    };
    assert_eq!(plates("0.2")?.shape, Shape::ParallelPlates { gap_mm: 0.2, width_mm: 30.0 });
    assert_refused(plates("40"), &["element.toml:4, column 10 (gap_mm): 40 mm is not below the width of 30 mm"]);
    Ok(())
}

#[test]
fn fluids_files() -> Outcome {
    let folder = tempfile::tempdir()?;
    let path = folder.path().join("fluids.toml");
    let oil = "[workshop-oil]\nkind = \"oil\"\nkinematic_viscosity_mm2_s = [[40.0, 32.0], [100.0, 5.4]]\n\
               density_kg_m3 = [15.0, 870.0]\nexpansion_per_K = 7.3e-4\nu_viscosity_rel = 0.005\n";
    let mix = "[coolant]\nkind = \"water-glycol\"\nglycol = \"ethylene\"\nmass_fraction = 0.30\n";
    let both = format!("{oil}{mix}");
    for (from, to, parts) in [
        ("5.4]]", "54]]", &["fluids.toml:3, column 29 (kinematic_viscosity_mm2_s)", "54 mm2/s at 100 C"][..]),
        ("[[40.0, 32.0], [100.0, 5.4]]", "[40.0, 32.0]", &["fluids.toml:3, column 30", "\"40.0\" is not a pair"]),
        ("[15.0, 870.0]", "870", &["fluids.toml:4, column 17 (density_kg_m3): \"870\" is not a pair"]),
        ("870.0", "0.87", &["fluids.toml:4, column 24 (density_kg_m3): 0.87 kg/m3 is outside 300 kg/m3"]),
        ("7.3e-4", "-1.0", &["fluids.toml:5, column 19 (expansion_per_K): -1 1/K"]),
        ("u_viscosity_rel", "u_viscosity", &["fluids.toml:6, column 1 (u_viscosity)", "did you mean u_viscosity_rel?"]),
        ("ethylene", "Ethylene", &["fluids.toml:9, column 10 (glycol): \"Ethylene\"", "did you mean ethylene?"]),
        ("0.30", "30", &["fluids.toml:10, column 17 (mass_fraction): 30 is outside 0 to 1"]),
        ("mass_fraction = 0.30", "", &["fluids.toml:7, column 1 (mass_fraction)", "missing in [coolant]"]),
        ("[coolant]", "[\"cool ant\"]", &["fluids.toml:7", "\"cool ant\""]),
        ("[workshop-oil]", "x = 1\n[workshop-oil]", &["fluids.toml:1, column 1 (x)", "not a table"]),
    ] {
        fs::write(&path, both.replacen(from, to, 1))?;
        assert_refused(fluids_file::open(&path), parts);
    }
    fs::write(&path, "# nothing\n")?;
    assert_refused(fluids_file::open(&path), &["fluids.toml:1", "declares no fluid"]);
    fs::write(&path, both)?;
    let names: Vec<String> = fluids_file::open(&path)?.into_iter().map(|fluid| fluid.name).collect();
    assert_eq!(names, ["workshop-oil", "coolant"]);
    Ok(())
}

#[test]
fn fluid_tables() -> Outcome {
    let folder = tempfile::tempdir()?;
    let (path, data) = (folder.path().join("fluids.toml"), folder.path().join("gas.csv"));
    fs::write(&path, "[gas]\nkind = \"table\"\ndata = \"gas.csv\"\n")?;
    assert_refused(fluids_file::open(&path), &["gas.csv: cannot open"]);
    let header = "temperature_C,viscosity_mPa_s,density_kg_m3";
    for (text, parts) in [
        (format!("{header}\n0,1,900\n10,1,900\n20,1,900\n"), &["gas.csv:1: 3 rows", "at least 4"][..]),
        (format!("{header}\n0,1,900\n20,1,900\n10,1,900\n20,1,900\n"), &["gas.csv:5, column 1", "293.15 K", "line 3"]),
        (format!("{header}\n0,-1,900\n"), &["gas.csv:2, column 2 (viscosity_mPa_s): \"-1\"", "-0.001 Pa s is outside"]),
        (format!("{header}\n0,1,9e9\n"), &["gas.csv:2, column 3 (density_kg_m3): \"9e9\"", "30000 kg/m3"]),
        (format!("{header}\n300,1,900\n"), &["gas.csv:2, column 1 (temperature_C): \"300\"", "in K?"]),
        (
            "temperature_C,density_kg_m3\n0,1\n".to_owned(),
            &["gas.csv:1: column viscosity_Pa_s or viscosity_mPa_s is missing"],
        ),
        ("viscosity_Pa_s,density_kg_m3\n0,1\n".to_owned(), &["gas.csv:1: column temperature_<unit> is missing"]),
    ] {
        fs::write(&data, text)?;
        assert_refused(fluids_file::open(&path), parts);
    }
    fs::write(&data, format!("{header}\n30,1,900\n10,3,920\n20,2,910\n0,4,930\n"))?;
    let DeclaredFluid::Table { rows, .. } = fluids_file::open(&path)?.remove(0).fluid else {
        return Err("a table was expected".into());
    };
    assert_eq!((rows.len(), rows[0].temperature, rows[0].viscosity, rows[0].density), (4, 273.15, 0.004, 930.0));
    Ok(())
}

#[test]
fn files_the_system_refuses() -> Outcome {
    let folder = tempfile::tempdir()?;
    let (file, missing) = (folder.path().join("file"), folder.path().join("none/out.csv"));
    fs::write(&file, "older")?;
    assert_refused(Table::open(&missing).map(|_| ()), &["none/out.csv: cannot open"]);
    assert_refused(Table::open(folder.path()).map(|_| ()), &["cannot"]);
    assert_refused(ElementFile::open(&missing), &["none/out.csv: cannot open"]);
    assert_refused(write_whole(&missing, b"x"), &["none/out.csv: cannot make a file in the folder", "none"]);
    assert_refused(write_whole(file.join("out.csv"), b"x"), &["file/out.csv: cannot make a file in the folder"]);
    assert_refused(write_whole(folder.path(), b"x"), &["this is a folder"]);
    Ok(())
}

#[test]
fn an_older_file_survives_until_the_new_one_is_complete() -> Outcome {
    let folder = tempfile::tempdir()?;
    let path = folder.path().join("out.csv");
    fs::write(&path, "older")?;
    let mut sink = Sink::create(&path)?;
    sink.write_all(&[b'x'; 200_000])?;
    assert_eq!(fs::read(&path)?, b"older");
    drop(sink);
    assert_eq!(fs::read_dir(folder.path())?.count(), 1);
    write_whole(&path, b"newer")?;
    assert_eq!((fs::read(&path)?, fs::read_dir(folder.path())?.count()), (b"newer".to_vec(), 1));
    Ok(())
}

#[cfg(target_os = "linux")]
#[test]
fn a_full_disk_is_reported() {
    let full = Path::new("/dev/full");
    assert_refused(write_whole(full, b"x"), &["/dev/full: cannot write", "No space left"]);
    assert!(full.exists());
}

#[cfg(unix)]
#[test]
fn links_and_permissions_are_kept() -> Outcome {
    use std::os::unix::fs::{PermissionsExt, symlink};
    let folder = tempfile::tempdir()?;
    let (path, link) = (folder.path().join("out.csv"), folder.path().join("link.csv"));
    fs::write(&path, "older")?;
    fs::set_permissions(&path, fs::Permissions::from_mode(0o640))?;
    symlink(&path, &link)?;
    write_whole(&link, b"newer")?;
    assert!(fs::symlink_metadata(&link)?.is_symlink());
    assert_eq!((fs::read(&path)?, fs::metadata(&path)?.permissions().mode() & 0o777), (b"newer".to_vec(), 0o640));
    Ok(())
}

/// Rows without end, a block at a time.
struct ManyRows(&'static [u8], usize);

impl Read for ManyRows {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        for (at, byte) in buffer.iter_mut().enumerate() {
            *byte = self.0[(self.1 + at) % self.0.len()];
        }
        self.1 += buffer.len();
        Ok(buffer.len())
    }
}

/// Reads a million rows; run it by name in release to see the time.
#[test]
fn a_million_rows() -> Outcome {
    let rows = 1_000_000;
    let input = HEADER.as_bytes().chain(ManyRows(b"4.98213,20.0371,101.325,12.3456\n", 0));
    let mut table = Table::from_reader("bench.csv", input)?;
    let (plan, start, mut sum) = (ReadingsPlan::bind(&table)?, Instant::now(), 0.0);
    for _ in 0..rows {
        let row = table.next_row()?.ok_or("a row")?;
        sum += plan.reading(&row)?.pressure_drop + row.number(3)?.unwrap_or_default();
    }
    println!("{rows} rows in {:.3} s", start.elapsed().as_secs_f64());
    assert!((sum / f64::from(rows) - 4982.13).abs() < 1e-2);
    Ok(())
}

proptest! {
    #[test]
    fn any_bytes_are_read_or_refused(bytes in proptest::collection::vec(any::<u8>(), 0..400)) {
        let _ = readings(bytes);
    }

    #[test]
    fn any_cells_are_read_or_refused(body in "[\"#,\r\n 0-9.eE+-]{0,200}") {
        let text = format!("{HEADER}{body}");
        let _ = points(&text);
        let Ok(mut table) = Table::from_reader("bench.csv", io::Cursor::new(text)) else {
            return Ok(());
        };
        while let Ok(Some(row)) = table.next_row() {
            prop_assert_eq!(row.raw().len(), 4);
        }
    }

    #[test]
    fn any_toml_is_read_or_refused(text in "([a-z_]{0,9}[\\[\\]=\"'.,{}0-9 \n\u{e4}-]{0,9}){0,9}") {
        let _ = element(&text);
        let _ = fluids_file::read(&TomlText::new("fluids.toml", &text), Path::new("/none"));
    }

    #[test]
    fn numbers_survive(value in any::<f64>().prop_filter("finite", |value| value.is_finite())) {
        let mut table = Table::from_reader("t.csv", io::Cursor::new(format!("x,pressure_drop_Pa\n{value:?},{value}\n")))?;
        let row = table.next_row()?.ok_or(TestCaseError::fail("a row"))?;
        prop_assert_eq!(row.number(0)?.map(f64::to_bits), Some(value.to_bits()));
        prop_assert_eq!(row.number(1)?, Some(value));
    }
}
