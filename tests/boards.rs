//! The library on emulated machines: the desktop's bits, no panic, cost within its budget.
//!
//! The desktop's own bits are always compared with those the machines gave. The machines run when `EVENBORE_BOARDS=1`
//! (`tests/all.sh` sets it), which needs the emulators and targets named by the message when they are missing.
//! `EVENBORE_BLESS=1` runs them too and writes anew what they give: `expected/` and `cost.md` in `boards/emulated`.

#[path = "boards/cost.rs"]
mod cost;
#[path = "boards/image.rs"]
mod image;
#[path = "boards/machine.rs"]
mod machine;
#[path = "../boards/emulated/src/readings.rs"]
#[allow(dead_code)] // the machines use more of it
mod readings;

use evenbore::Reading;
use evenbore::quantity::{AbsolutePressure, PressureDrop, Temperature};
use machine::{Machine, blessing, decoded, folder, machines, requested};
use std::collections::BTreeSet;
use std::fs;

const BLESS: &str = "if the arithmetic was meant to change, EVENBORE_BLESS=1 cargo test --test boards";

/// What the program `identity` prints, computed here.
fn identity_here() -> String {
    let mut text = String::new();
    let all = readings::run(|s| {
        text += &format!("{} {} {} {:08x} {:016x}\n", s.element, s.fluid, s.refused, s.last_flow, s.digest);
    });
    text + &format!("all {:016x}\n", all.expect("the library accepts its own meters"))
}

/// The first line in which two texts differ; whole digests tell a reader nothing.
fn first_difference<'a>(found: &'a str, expected: &'a str) -> Option<(&'a str, &'a str)> {
    let ends = |text: &'a str| text.lines().chain(std::iter::repeat("(end)"));
    let most = found.lines().count().max(expected.lines().count());
    ends(found).zip(ends(expected)).take(most).find(|(f, e)| f != e)
}

#[test]
fn every_machine_has_its_expectation_and_every_expectation_its_machine() {
    if blessing() {
        return;
    }
    let names: BTreeSet<String> = machines().into_iter().map(|m| m.name).collect();
    let files = fs::read_dir(folder().join("expected")).expect("boards/emulated/expected");
    let files: BTreeSet<String> =
        files.map(|f| f.unwrap().path().file_stem().unwrap().to_string_lossy().into_owned()).collect();
    assert_eq!(files, names, "left: boards/emulated/expected, right: boards/emulated/.cargo/config.toml");
}

#[test]
fn the_desktop_gives_the_bits_of_the_machines() {
    if blessing() {
        return;
    }
    let here = identity_here();
    for machine in machines() {
        let expected = machine.expectation();
        assert_eq!(first_difference(&here, &expected), None, "left: desktop, right: {}; {BLESS}", machine.name);
    }
}

#[test]
fn every_machine_gives_the_bits_of_the_desktop() {
    let here = identity_here();
    for machine in requested() {
        let found = machine.run("identity");
        assert_eq!(first_difference(&found, &here), None, "left: {}, right: desktop", machine.name);
        if blessing() {
            fs::write(machine.expectation_path(), found).unwrap();
        }
    }
}

/// Every program of the machines links with a panic handler that calls a function nobody defines, so no panic can be
/// reached in them, optimised for speed or for size; the counter-example, whose index may be wrong, must not link for just this reason.
#[test]
fn no_machine_can_panic() {
    for machine in requested() {
        for level in ["3", "s"] {
            let built = machine.build_at(level, &[]);
            built.unwrap_or_else(|message| panic!("{}: a panic is reachable at {level}:\n{message}", machine.name));
        }
        let failure = machine.build(&["--bin", "counter_example", "--features", "counter-example"]).unwrap_err();
        let reason = "undefined symbol: a_panic_is_reachable";
        assert!(failure.contains(reason), "{}: another failure than expected:\n{failure}", machine.name);
    }
}

/// What the program `log` says, in words, is what the desktop computes.
#[test]
fn every_machine_logs_a_flow_in_words() {
    let record = readings::record().unwrap();
    let meter = record.meter().unwrap();
    let reading = Reading::new(
        PressureDrop::from_pascals(1500.0),
        Temperature::from_kelvin(296.55),
        AbsolutePressure::from_pascals(1.2e5),
    );
    let flow = meter.flow(&reading).unwrap();
    let endless = Reading { pressure_drop: PressureDrop::from_pascals(f32::INFINITY), ..reading };
    let refusal = meter.flow(&endless).unwrap_err();
    let expected = [
        "info serial EB-0042, Single".to_owned(),
        format!(
            "info flow Flow {{ sample: Sample {{ volume: VolumeFlow({}),",
            flow.volume.as_cubic_metres_per_second()
        ),
        format!("warn no flow: Refusal({:b})", refusal.bits()),
    ];
    for machine in requested() {
        let (image, frames) = machine.log();
        let text = decoded(&image, &frames);
        assert_eq!(text.lines().count(), expected.len(), "{}: {text}", machine.name);
        for (line, expected) in text.lines().zip(&expected) {
            assert!(line.starts_with(expected), "{}: {line}, expected {expected}", machine.name);
        }
        assert!(text.contains(&format!("uncertainty: Uncertainty {{ fit: {},", flow.uncertainty.fit)), "{text}");
    }
}

#[test]
fn cost_stays_within_its_budget() {
    let found: Vec<(Machine, cost::Costs)> = requested()
        .into_iter()
        .map(|machine| {
            let costs = cost::Costs::of(&machine);
            (machine, costs)
        })
        .collect();
    if found.is_empty() {
        return;
    }
    let (table, path) = (cost::table(&found), folder().join("cost.md"));
    if blessing() {
        fs::write(&path, &table).unwrap();
        quote(&cost::summary(&table));
    }
    let complaints = cost::complaints(&found, &fs::read_to_string(folder().join("budget.txt")).unwrap());
    assert!(complaints.is_empty(), "boards/emulated/budget.txt:\n{}", complaints.join("\n"));
    let written = fs::read_to_string(&path).unwrap_or_default();
    let stale = "boards/emulated/cost.md is not what was counted; EVENBORE_BLESS=1 cargo test --test boards writes it";
    assert_eq!(first_difference(&table, &written), None, "left: counted, right: cost.md: {stale}");
}

/// Puts a table into the README in place of the one that starts alike.
fn quote(table: &str) {
    let path = folder().join("../../README.md");
    let readme = fs::read_to_string(&path).unwrap();
    let start = readme.find("| instructions | M4F |").expect("README.md has a table of costs");
    let end = readme[start..].find("\n\n").map_or(readme.len(), |n| start + n + 1);
    fs::write(&path, [&readme[..start], table, &readme[end..]].concat()).unwrap();
}

/// The README quotes three machines of `boards/emulated/cost.md`.
#[test]
fn the_readme_quotes_what_was_counted() {
    if blessing() {
        return;
    }
    let root = folder().join("../..");
    let readme = fs::read_to_string(root.join("README.md")).unwrap();
    let counted = fs::read_to_string(folder().join("cost.md")).unwrap();
    for line in cost::summary(&counted).lines() {
        assert!(readme.contains(line), "README.md lacks what cost.md says:\n{}", cost::summary(&counted));
    }
}
