//! Gives the linker the memory map of the machine that the target triple stands for.

use std::path::Path;
use std::{env, fs};

fn main() {
    let target = env::var("TARGET").unwrap();
    let out = env::var("OUT_DIR").unwrap();
    let map = format!("memory/{target}.x");
    println!("cargo::rerun-if-changed={map}");
    let text = fs::read(&map).unwrap_or_else(|_| panic!("no machine for {target}: {map} is missing"));
    fs::write(Path::new(&out).join("memory.x"), text).unwrap();
    println!("cargo::rustc-link-search={out}");
    if target.starts_with("riscv") {
        println!("cargo::rustc-link-arg-bins=-Tmemory.x");
    }
    println!("cargo::rustc-link-arg-bins=-Tlink.x");
    println!("cargo::rustc-link-arg-bins=--nmagic");
    if env::var_os("CARGO_FEATURE_LOG").is_some() {
        println!("cargo::rustc-link-arg-bins=-Tdefmt.x");
    }
}
