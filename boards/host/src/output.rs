//! Files going out: complete or not at all, and standard output for `-`.

pub mod atomic;

use std::{
    io::{self, BufWriter, Stdout, Write},
    path::{Path, PathBuf},
};

use crate::{
    input::{problem::Problem, source::is_dash},
    output::atomic::WholeFile,
};

/// Name of standard output in messages.
const STDOUT: &str = "standard output";

/// Where a command's rows go: a file that appears when finished, or standard output.
///
/// Dropped without [`Sink::finish`], it leaves no file behind and an older one untouched.
///
/// ```
/// use std::io::Write;
/// use evenbore_bench::output::Sink;
/// let folder = tempfile::tempdir()?;
/// let path = folder.path().join("flow.csv");
/// let mut sink = Sink::create(&path)?;
/// writeln!(sink, "status").map_err(|error| sink.problem(&error))?;
/// assert!(!path.exists());
/// sink.finish()?;
/// assert_eq!(std::fs::read_to_string(&path)?, "status\n");
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
pub struct Sink {
    target: Target,
}

/// Either kind of target.
enum Target {
    Stdout(BufWriter<Stdout>),
    File(WholeFile),
}

impl Sink {
    /// Starts writing.
    ///
    /// * `path`: of the file, or `-` for standard output
    ///
    /// # Errors
    /// Names the folder in which no file could be made.
    pub fn create(path: impl AsRef<Path>) -> Result<Self, Problem> {
        let path = path.as_ref();
        if is_dash(path) { Ok(Self::stdout()) } else { Ok(Self { target: Target::File(WholeFile::create(path)?) }) }
    }

    /// Writes to standard output.
    pub fn stdout() -> Self {
        Self { target: Target::Stdout(BufWriter::new(io::stdout())) }
    }

    /// Completes the output: everything is on the disk and the file bears its name.
    ///
    /// # Errors
    /// Where the system refuses, for example because the disk is full.
    pub fn finish(self) -> Result<(), Problem> {
        match self.target {
            Target::Stdout(mut out) => {
                let done = out.flush();
                // Whatever could not be written must not be tried again, and fail again, at the end of its life.
                drop(out.into_parts());
                done.map_err(|error| Problem::io(STDOUT, "cannot write", &error))
            }
            Target::File(file) => file.finish(),
        }
    }

    /// Explains an error of [`Write`]; one of a pipe that nobody reads any more is [`Problem::is_closed_pipe`].
    ///
    /// * `error`: the system's answer
    pub fn problem(&self, error: &io::Error) -> Problem {
        match &self.target {
            Target::Stdout(_) => Problem::io(STDOUT, "cannot write", error),
            Target::File(file) => file.problem(error),
        }
    }
}

impl Write for Sink {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        match &mut self.target {
            Target::Stdout(out) => out.write(bytes),
            Target::File(file) => file.write(bytes),
        }
    }

    fn flush(&mut self) -> io::Result<()> {
        match &mut self.target {
            Target::Stdout(out) => out.flush(),
            Target::File(file) => file.flush(),
        }
    }
}

/// A number in the fewest digits that give its bits back.
///
/// ```
/// use evenbore_bench::output::shortest;
/// assert_eq!((shortest(0.1), shortest(2.5e-5)), ("0.1".to_string(), "2.5e-5".to_string()));
/// ```
pub fn shortest(value: f32) -> String {
    if (1e-4..1e7).contains(&value.abs()) || value == 0.0 { format!("{value}") } else { format!("{value:e}") }
}

/// Writes several files that belong together: each is complete beside its place before the first gets its name.
///
/// * `files`: path and content, in the order in which they get their names
/// * `between`: what to do once all are complete and none has its name
///
/// # Errors
/// Where the system refuses; before the first got its name, then none has.
pub fn write_together(
    files: &[(PathBuf, &[u8])],
    between: impl FnOnce() -> Result<(), Problem>,
) -> Result<(), Problem> {
    let complete = |(path, bytes): &(PathBuf, &[u8])| {
        let mut file = WholeFile::create(path)?;
        file.write_all(bytes).and_then(|()| file.flush()).map_err(|error| file.problem(&error))?;
        Ok(file)
    };
    let complete = files.iter().map(complete).collect::<Result<Vec<WholeFile>, Problem>>()?;
    between()?;
    complete.into_iter().try_for_each(WholeFile::finish)
}

/// Writes a whole file, or to standard output for `-`.
///
/// * `path`: as the user gave it
/// * `bytes`: the content
///
/// # Errors
/// Where the system refuses; then no half-written file is left.
pub fn write_whole(path: impl AsRef<Path>, bytes: &[u8]) -> Result<(), Problem> {
    let mut sink = Sink::create(path)?;
    sink.write_all(bytes).map_err(|error| sink.problem(&error))?;
    sink.finish()
}
