//! The walk can be read from top to bottom: a file imports only from files declared above it, and keeps its promises.

use std::fs;
use std::path::{Path, PathBuf};

/// A file of the walk: where it stands in the tree (`fluid::stored`) and its text.
struct File {
    path: Vec<String>,
    disk: PathBuf,
    text: String,
}

/// The modules a file declares, in order, with the names of `mod x;` lines outside comments.
fn declared(text: &str) -> Vec<String> {
    let lines = text.lines().map(|line| line.split("//").next().unwrap_or("").trim());
    let names = lines.filter_map(|line| {
        let words: Vec<&str> = line.strip_suffix(';')?.split_whitespace().collect();
        let [rest @ .., "mod", name] = words.as_slice() else { return None };
        rest.iter().all(|word| word.starts_with("pub")).then(|| (*name).to_owned())
    });
    names.collect()
}

/// All files below `root` in the order of their declarations, a file before the modules it declares.
fn walk(root: &Path) -> Vec<File> {
    fn visit(disk: &Path, folder: &Path, path: Vec<String>, files: &mut Vec<File>) {
        let text = fs::read_to_string(disk).unwrap_or_else(|error| panic!("{}: {error}", disk.display()));
        let names = declared(&text);
        files.push(File { path: path.clone(), disk: disk.to_owned(), text });
        for name in names {
            let (flat, nested) = (folder.join(format!("{name}.rs")), folder.join(&name).join("mod.rs"));
            let child = if flat.exists() { flat } else { nested };
            visit(&child, &folder.join(&name), [path.clone(), vec![name]].concat(), files);
        }
    }
    let mut files = Vec::new();
    visit(root, root.parent().unwrap(), Vec::new(), &mut files);
    files
}

/// The code of a file: without comments and without what follows `#[cfg(test)]`.
fn code(text: &str) -> String {
    let body = text.split("#[cfg(test)]\nmod").next().unwrap_or("");
    body.lines().map(|line| line.split("//").next().unwrap_or("")).collect::<Vec<_>>().join("\n")
}

/// All `crate::...` and `super::...` paths in a file's code, as segments; groups in braces are opened.
fn imports(text: &str) -> Vec<Vec<String>> {
    let code = code(text);
    let mut found = Vec::new();
    for root in ["crate::", "super::"] {
        for (at, _) in code.match_indices(root) {
            let before = code[..at].chars().next_back();
            if before.is_some_and(|c| c.is_alphanumeric() || c == '_' || c == ':') {
                continue; // the middle of a longer word or path
            }
            open_path(&code[at..], &[], &mut found);
        }
    }
    found
}

/// Adds the path at the start of `text` to `found`, behind `prefix`; one path for each entry of a group.
fn open_path(text: &str, prefix: &[String], found: &mut Vec<Vec<String>>) {
    let mut path = prefix.to_vec();
    let mut rest = text.trim_start();
    loop {
        let end = rest.find(|c: char| !(c.is_alphanumeric() || c == '_')).unwrap_or(rest.len());
        if end == 0 {
            break;
        }
        path.push(rest[..end].to_owned());
        let Some(next) = rest[end..].strip_prefix("::") else { break };
        rest = next;
        if let Some(group) = rest.strip_prefix('{') {
            for entry in entries(group) {
                open_path(entry, &path, found);
            }
            return;
        }
    }
    found.push(path);
}

/// The comma-separated entries of a group up to its closing brace.
fn entries(group: &str) -> Vec<&str> {
    let (mut depth, mut start, mut list) = (0, 0, Vec::new());
    for (at, c) in group.char_indices() {
        match c {
            '{' => depth += 1,
            '}' if depth == 0 => {
                list.push(&group[start..at]);
                break;
            }
            '}' => depth -= 1,
            ',' if depth == 0 => {
                list.push(&group[start..at]);
                start = at + 1;
            }
            _ => {}
        }
    }
    list.into_iter().filter(|entry| !entry.trim().is_empty()).collect()
}

/// The place in the tree that an import of `file` names: `super` climbs, `crate` starts at the root.
fn absolute(file: &[String], import: &[String]) -> Vec<String> {
    let mut at = if import[0] == "crate" { Vec::new() } else { file.to_vec() };
    for segment in import {
        match segment.as_str() {
            "crate" | "self" => {}
            "super" => {
                at.pop();
            }
            name => at.push(name.to_owned()),
        }
    }
    at
}

/// Whether a file may import items of the file that declares it.
#[derive(Clone, Copy, PartialEq)]
enum Parents {
    /// It may: the declaring file stands above.
    Allowed,
    /// It may not: the declaring file is complete only once its children are.
    Forbidden,
}

/// Imports that point to a module declared later.
fn violations(files: &[File], parents: Parents) -> Vec<String> {
    let mut found = Vec::new();
    for (here, file) in files.iter().enumerate() {
        for import in imports(&file.text) {
            let target = absolute(&file.path, &import);
            // The longest beginning of the path that is a module; what follows is an item of it.
            let module = (0..=target.len()).rev().find_map(|n| files.iter().position(|f| f.path == target[..n]));
            let there = module.unwrap_or_else(|| panic!("{import:?} leads nowhere"));
            let own = there == here || files[there].path.starts_with(&file.path);
            let parent = there != here && file.path.starts_with(&files[there].path);
            if (there > here && !own) || (parent && parents == Parents::Forbidden) {
                found.push(format!("{} imports {}", file.path.join("::"), import.join("::")));
            }
        }
    }
    found
}

fn planted(files: &[(&str, &str)]) -> Vec<File> {
    let split = |path: &str| path.split("::").filter(|part| !part.is_empty()).map(str::to_owned).collect();
    files
        .iter()
        .map(|(path, text)| File { path: split(path), disk: PathBuf::new(), text: (*text).to_owned() })
        .collect()
}

fn library() -> Vec<File> {
    walk(&Path::new(env!("CARGO_MANIFEST_DIR")).join("src/lib.rs"))
}

fn bench() -> Vec<File> {
    walk(&Path::new(env!("CARGO_MANIFEST_DIR")).join("boards/host/src/lib.rs"))
}

#[test]
fn the_checker_finds_what_is_planted() {
    let tree = |first: &str, second: &str| {
        let files = [("", "mod units;\nmod flow;"), ("units", first), ("flow", second), ("flow::law", "")];
        violations(&planted(&files), Parents::Allowed)
    };
    assert_eq!(tree("", "use crate::units::Metre;"), Vec::<String>::new());
    assert_eq!(tree("use crate::flow::Flow;", ""), ["units imports crate::flow::Flow"]);
    assert_eq!(tree("use super::flow::Flow;", ""), ["units imports super::flow::Flow"]);
    assert_eq!(tree("use crate::{\n    flow::{law, Flow},\n};", "").len(), 2);
    assert_eq!(tree("fn f() -> crate::flow::Flow {}", "").len(), 1);
    assert_eq!(tree("// use crate::flow::Flow;", ""), Vec::<String>::new());
    assert_eq!(tree("", "use crate::flow::law::Law;"), Vec::<String>::new());
    let parent = planted(&[("", "mod flow;"), ("flow", "mod law;"), ("flow::law", "use super::Flow;")]);
    assert_eq!(violations(&parent, Parents::Forbidden), ["flow::law imports super::Flow"]);
    assert_eq!(violations(&parent, Parents::Allowed), Vec::<String>::new());
    assert_eq!(declared("pub mod a; // first\npub(crate) mod b;\n// mod c;\nmod tests {\n"), ["a", "b"]);
}

#[test]
fn files_of_the_library_import_only_from_files_above_them() {
    let files = library();
    assert!(files.len() > 30, "only {} files were found", files.len());
    assert_eq!(violations(&files, Parents::Forbidden), Vec::<String>::new());
}

#[test]
fn files_of_the_bench_import_only_from_files_above_them() {
    let files = bench();
    assert!(files.len() > 30, "only {} files were found", files.len());
    assert_eq!(violations(&files, Parents::Allowed), Vec::<String>::new());
}

/// Every Rust file below a folder, build output left out.
fn rust_files(folder: &Path) -> Vec<PathBuf> {
    let Ok(entries) = fs::read_dir(folder) else { return Vec::new() };
    let mut found = Vec::new();
    for path in entries.map(|entry| entry.unwrap().path()) {
        if path.is_dir() && path.file_name().is_some_and(|name| name != "target") {
            found.extend(rust_files(&path));
        } else if path.extension().is_some_and(|extension| extension == "rs") {
            found.push(path);
        }
    }
    found
}

#[test]
fn every_file_of_the_library_is_part_of_the_walk() {
    let src = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut on_disk = rust_files(&src);
    let mut walked: Vec<PathBuf> = library().into_iter().map(|file| file.disk).collect();
    on_disk.sort();
    walked.sort();
    assert_eq!(on_disk, walked);
}

#[test]
fn only_one_file_names_the_mathematics_it_borrows() {
    for file in library() {
        let named = ["libm", "micromath"].iter().any(|name| code(&file.text).contains(name));
        assert_eq!(named, file.path == ["math"], "{}", file.disk.display());
    }
}

#[test]
fn nothing_in_the_library_can_panic_by_its_own_words() {
    let words = [".unwrap()", ".expect(", "panic!", "unreachable!", "todo!", "unimplemented!", "assert!", "assert_eq!"];
    for file in library() {
        // What is asserted while compiling cannot fail afterwards.
        let code = code(&file.text).replace("const { assert!(", "");
        for word in words {
            assert!(!code.contains(word), "{} says {word}", file.disk.display());
        }
    }
}

#[test]
fn no_file_is_longer_than_400_lines() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let files = ["src", "boards"].map(|folder| rust_files(&root.join(folder))).concat();
    assert!(files.len() > 60);
    for file in files.iter().filter(|file| !file.components().any(|part| part.as_os_str() == "tests")) {
        let text = fs::read_to_string(file).unwrap();
        let lines = text.lines().count();
        let generated = text.lines().next().is_some_and(|line| line.starts_with("// Generated by"));
        assert!(lines <= 400 || generated, "{} has {lines} lines", file.display());
    }
}
