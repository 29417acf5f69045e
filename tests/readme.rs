//! The README says what the code says: versions, accuracies and the promised commands stand there as they are here.

mod common;

use common::tolerance;
use std::fs;
use std::path::Path;

fn text(file: &str) -> String {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(file);
    fs::read_to_string(&path).unwrap_or_else(|error| panic!("{}: {error}", path.display()))
}

/// The value of `key = "..."` in a manifest.
fn field(manifest: &str, key: &str) -> String {
    let line = manifest.lines().find(|line| line.trim_start().starts_with(key)).unwrap_or_else(|| panic!("no {key}"));
    line.split('"').nth(1).unwrap_or_else(|| panic!("{key} is no text")).to_owned()
}

#[test]
fn versions_are_those_of_the_manifests() {
    let readme = text("README.md");
    let (library, bench) = (text("Cargo.toml"), text("boards/host/Cargo.toml"));
    let compilers = format!(
        "Rust {} or newer for\nthe library, {} for the bench",
        field(&library, "rust-version"),
        field(&bench, "rust-version")
    );
    let one_line = |text: &str| text.split_whitespace().collect::<Vec<_>>().join(" ");
    assert!(one_line(&readme).contains(&one_line(&compilers)), "{compilers}");
    let version = field(&library, "version");
    let short = version.rsplit_once('.').expect("three numbers").0.to_owned();
    assert!(readme.contains(&format!("evenbore = \"{short}\"")), "{short}");
}

/// A relative tolerance as the README writes it.
fn shown(relative: f64) -> String {
    match relative {
        r if r < 1e-4 => format!("{} ppm", (r * 1e9).round() / 1e3),
        r => format!("{} %", (r * 1e5).round() / 1e3),
    }
}

#[test]
fn accuracies_are_those_the_tests_hold() {
    let readme = text("README.md");
    let rows = [
        ("single against double precision, whole walk", shown(tolerance::SINGLE_AGAINST_DOUBLE)),
        ("fast arithmetic (curve) against double precision", shown(tolerance::CURVE_AGAINST_DOUBLE)),
        ("Poiseuille's law in the creeping limit", shown(tolerance::CREEPING_LIMIT)),
        ("f Re of ducts", shown(tolerance::FRICTION_REYNOLDS)),
        ("friction measured in air", shown(tolerance::MEASURED_AIR)),
        ("friction measured in thick oil", shown(tolerance::MEASURED_OIL[0])),
        ("oil table against ASTM D341", shown(tolerance::OIL_TABLE)),
        ("density of moist air", shown(tolerance::MOIST_DENSITY)),
        ("stated uncertainty against Monte Carlo", shown(tolerance::MONTE_CARLO)),
    ];
    for (what, limit) in rows {
        let row = readme
            .lines()
            .find(|line| line.starts_with(&format!("| {what}")))
            .unwrap_or_else(|| panic!("no row: {what}"));
        assert!(row.contains(&format!("| {limit} |")), "{row}: {limit}");
    }
}

#[test]
fn commands_and_features_exist() {
    let readme = text("README.md");
    let manifest = text("Cargo.toml");
    let features = manifest.split("[features]").nth(1).and_then(|rest| rest.split("\n\n").next()).expect("features");
    let names = features.lines().filter_map(|line| line.split_once(" =")).map(|(name, _)| name);
    for name in names.filter(|name| *name != "default") {
        assert!(readme.contains(&format!("`{name}` (")), "feature {name} is not described");
    }
    assert!(readme.contains("bash tests/all.sh"));
    for file in ["examples/workshop/bench-nitrogen.csv", "examples/workshop/element.toml", "examples/slow_and_fast.rs"]
    {
        assert!(readme.contains(file) && Path::new(env!("CARGO_MANIFEST_DIR")).join(file).exists(), "{file}");
    }
}
