//! Gives the linker the memory map and the scripts of start code and logging.

use std::path::Path;
use std::{env, fs};

fn main() {
    let out = env::var("OUT_DIR").unwrap();
    fs::copy("memory.x", Path::new(&out).join("memory.x")).unwrap();
    println!("cargo::rerun-if-changed=memory.x");
    println!("cargo::rustc-link-search={out}");
    for argument in ["--nmagic", "-Tlink.x", "-Tdefmt.x"] {
        println!("cargo::rustc-link-arg-bins={argument}");
    }
}
