//! With feature `defmt`, every public type of the library can be logged.

use std::fs;
use std::path::{Path, PathBuf};

/// Public types that have no use in a log, each with the reason.
const EXCEPT: &[(&str, &str)] = &[("Store", "owns the flash driver, and drivers have no Format")];

/// All Rust files below a folder.
fn files(folder: &Path) -> Vec<PathBuf> {
    let entries = fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path());
    entries.flat_map(|path| if path.is_dir() { files(&path) } else { vec![path] }).collect()
}

/// The names of public types in a file for which no `Format` is derived or written.
fn lacking(text: &str) -> Vec<String> {
    let code = text.split("#[cfg(test)]\nmod").next().unwrap_or("");
    let mut attributes = String::new();
    let mut names = Vec::new();
    for line in code.lines().map(str::trim) {
        let words: Vec<&str> = line.split(|c: char| !c.is_alphanumeric() && c != '_').collect();
        if let ["pub", "struct" | "enum", name, ..] = words[..] {
            let written = [format!("defmt::Format for {name} "), format!("defmt::Format for {name}<")];
            if !attributes.contains("defmt::Format") && !written.iter().any(|start| code.contains(start)) {
                names.push(name.to_owned());
            }
        }
        match line {
            _ if line.starts_with("///") => {}
            _ if line.starts_with("#[") || line.starts_with(")]") => attributes += line,
            _ => attributes.clear(),
        }
    }
    names
}

#[test]
fn a_type_without_format_is_found() {
    assert_eq!(lacking("#[derive(Debug)]\npub struct Bare;\n"), ["Bare"]);
    assert!(lacking("#[cfg_attr(feature = \"defmt\", derive(defmt::Format))]\npub enum Full {}\n").is_empty());
}

#[test]
fn every_public_type_can_be_logged() {
    let mut lack = Vec::new();
    for file in files(&Path::new(env!("CARGO_MANIFEST_DIR")).join("src")) {
        for name in lacking(&fs::read_to_string(&file).unwrap()) {
            if !EXCEPT.iter().any(|(except, _)| *except == name) {
                lack.push(format!("{}: {name}", file.display()));
            }
        }
    }
    assert!(lack.is_empty(), "no defmt::Format:\n{}", lack.join("\n"));
}
