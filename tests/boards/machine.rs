//! The emulated machines: listed in `boards/emulated/.cargo/config.toml`, built by cargo, run by their runner.

use std::env;
use std::fs;
use std::io::{Read, Write};
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};
use std::time::{Duration, Instant};

/// Longest time a program may run before it counts as hung.
const PATIENCE: Duration = Duration::from_secs(300);

/// A machine of the list.
pub struct Machine {
    /// The emulator's name for it.
    pub name: String,
    /// The target triple.
    pub target: String,
    /// Emulator and arguments; the program's path comes last.
    runner: Vec<String>,
}

/// The folder of the emulated machines.
pub fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("boards/emulated")
}

/// Whether expectations are written instead of compared.
pub fn blessing() -> bool {
    env::var_os("EVENBORE_BLESS").is_some_and(|v| v == "1")
}

/// All machines, as the list has them.
pub fn machines() -> Vec<Machine> {
    let list = fs::read_to_string(folder().join(".cargo/config.toml")).expect("boards/emulated/.cargo/config.toml");
    let targets = list.lines().filter_map(|l| l.strip_prefix("[target.")?.strip_suffix(']'));
    let runners = list.lines().filter_map(|l| l.strip_prefix("runner = \"")?.strip_suffix('"'));
    let machines = targets.zip(runners).map(|(target, runner)| {
        let runner: Vec<String> = runner.split(' ').map(str::to_owned).collect();
        let at = runner.iter().position(|word| word == "-M").expect("a runner names its machine by -M");
        Machine { name: runner[at + 1].clone(), target: target.to_owned(), runner }
    });
    machines.collect()
}

/// All machines when they are asked for and can run; none, said plainly, when they are not asked for.
pub fn requested() -> Vec<Machine> {
    if !blessing() && env::var_os("EVENBORE_BOARDS").is_none_or(|v| v != "1") {
        // Written past the capture of test output, which `eprintln!` is not: what did not run must be seen.
        #[allow(clippy::explicit_write)]
        writeln!(std::io::stderr(), "boards: emulated machines NOT run; EVENBORE_BOARDS=1 runs them").unwrap();
        return Vec::new();
    }
    let machines = machines();
    for machine in &machines {
        machine.check_tools();
    }
    machines
}

impl Machine {
    /// Where the machine's expected output is kept.
    pub fn expectation_path(&self) -> PathBuf {
        folder().join("expected").join(format!("{}.txt", self.name))
    }

    /// The machine's expected output.
    pub fn expectation(&self) -> String {
        let path = self.expectation_path();
        fs::read_to_string(&path).unwrap_or_else(|e| panic!("{}: {e}; EVENBORE_BLESS=1 writes it", path.display()))
    }

    fn check_tools(&self) {
        let emulator = Command::new(&self.runner[0]).arg("--version").stdout(Stdio::null()).status();
        assert!(
            emulator.is_ok(),
            "{} is missing: apt-get install --no-install-recommends qemu-system-arm qemu-system-misc",
            self.runner[0]
        );
        let library = Command::new("rustc").args(["--print", "target-libdir", "--target", &self.target]).output();
        let library = String::from_utf8(library.expect("rustc").stdout).unwrap();
        assert!(Path::new(library.trim()).is_dir(), "a target is missing: rustup target add {}", self.target);
    }

    /// Builds the machine's programs in release.
    ///
    /// # Errors
    /// What cargo wrote.
    pub fn build(&self, arguments: &[&str]) -> Result<(), String> {
        self.build_at("3", arguments)
    }

    /// Builds the machine's programs in release at an optimisation level.
    ///
    /// # Errors
    /// What cargo wrote.
    pub fn build_at(&self, level: &str, arguments: &[&str]) -> Result<(), String> {
        self.build_in(if level == "3" { "target".to_owned() } else { format!("target/{level}") }, level, arguments)
    }

    fn build_in(&self, target: String, level: &str, arguments: &[&str]) -> Result<(), String> {
        let output = Command::new(env::var_os("CARGO").unwrap_or("cargo".into()))
            .current_dir(folder()) // or cargo ignores the folder's config
            .env("CARGO_TARGET_DIR", folder().join(target))
            .env("CARGO_PROFILE_RELEASE_OPT_LEVEL", level)
            .env_remove("RUSTFLAGS")
            .env_remove("CARGO_ENCODED_RUSTFLAGS")
            .args(["build", "--release", "--locked", "--target", &self.target])
            .args(arguments)
            .output()
            .expect("cargo");
        if output.status.success() { Ok(()) } else { Err(String::from_utf8_lossy(&output.stderr).into_owned()) }
    }

    /// The linked image of a program.
    pub fn image(&self, program: &str) -> PathBuf {
        folder().join("target").join(&self.target).join("release").join(program)
    }

    /// Builds the programs, runs one and returns what it prints.
    pub fn run(&self, program: &str) -> String {
        self.build(&[]).unwrap_or_else(|message| panic!("{}: {message}", self.name));
        String::from_utf8(self.start(&self.image(program))).unwrap()
    }

    /// Builds and runs the program that logs; returns its image and its frames.
    pub fn log(&self) -> (PathBuf, Vec<u8>) {
        // Its library is another, so its images lie apart.
        let built = self.build_in("target/log".to_owned(), "3", &["--bin", "log", "--features", "log"]);
        built.unwrap_or_else(|message| panic!("{}: {message}", self.name));
        let image = folder().join("target/log").join(&self.target).join("release/log");
        let frames = self.start(&image);
        (image, frames)
    }

    fn start(&self, image: &Path) -> Vec<u8> {
        let (emulator, arguments) = self.runner.split_first().unwrap();
        let mut child = Command::new(emulator)
            .args(arguments)
            .arg(image)
            .stdin(Stdio::null())
            .stdout(Stdio::piped())
            .spawn()
            .expect("emulator");
        let start = Instant::now();
        let status = loop {
            match child.try_wait().unwrap() {
                Some(status) => break status,
                None if start.elapsed() > PATIENCE => {
                    child.kill().unwrap();
                    panic!("{}: {} hangs", self.name, image.display());
                }
                None => std::thread::sleep(Duration::from_millis(20)),
            }
        };
        let mut printed = Vec::new();
        child.stdout.take().unwrap().read_to_end(&mut printed).unwrap();
        let text = String::from_utf8_lossy(&printed);
        assert!(status.success(), "{}: {}: {status}\n{text}", self.name, image.display());
        printed
    }
}

/// The text of frames that an image logged, by the decoder in `boards/emulated/decoder`.
pub fn decoded(image: &Path, frames: &[u8]) -> String {
    let mut child = Command::new(env::var_os("CARGO").unwrap_or("cargo".into()))
        .current_dir(folder().join("decoder"))
        .env("CARGO_TARGET_DIR", folder().join("target/decoder"))
        .args(["run", "--quiet", "--locked", "--"])
        .arg(image)
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .spawn()
        .expect("cargo");
    child.stdin.take().unwrap().write_all(frames).unwrap();
    let output = child.wait_with_output().unwrap();
    assert!(output.status.success(), "the decoder of {}: {}", image.display(), output.status);
    String::from_utf8(output.stdout).unwrap()
}
