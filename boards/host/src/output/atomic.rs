//! A file that is either complete or not there: written beside its place under another name, then renamed.

use std::{
    fs::{self, File, OpenOptions},
    io::{self, BufWriter, Write},
    path::{Path, PathBuf},
};

use tempfile::{Builder, NamedTempFile};

use crate::input::problem::Problem;

/// Bytes handed to the system at a time.
const CHUNK: usize = 1 << 16;

/// A file being written.
pub struct WholeFile {
    /// As the user gave it, for messages.
    name: String,
    target: Target,
}

/// Where the bytes go until the file is complete.
enum Target {
    /// Beside the final place, which links are followed to.
    Beside { out: BufWriter<NamedTempFile>, place: PathBuf },
    /// Straight into a device or pipe, which cannot be replaced.
    Device(BufWriter<File>),
}

impl WholeFile {
    /// Starts a file.
    ///
    /// * `path`: of the file; a device or named pipe is written to directly
    ///
    /// # Errors
    /// Names the path, the folder and the system's reason.
    pub fn create(path: &Path) -> Result<Self, Problem> {
        let name = path.display().to_string();
        let target = match fs::metadata(path) {
            Ok(data) if data.is_dir() => Err(Problem::new(&name, "this is a folder: the name of a file was expected")),
            Ok(data) if !data.is_file() => device(path),
            Ok(data) => beside(&fs::canonicalize(path).unwrap_or_else(|_| path.to_owned()), Some(data.permissions())),
            Err(_) => beside(path, None),
        }?;
        Ok(Self { name, target })
    }

    /// Completes the file: its content reaches the disk and it gets its name.
    ///
    /// # Errors
    /// Where the system refuses; then no half-written file is left.
    pub fn finish(self) -> Result<(), Problem> {
        let done = match self.target {
            Target::Device(mut out) => out.flush(),
            Target::Beside { out, place } => persist(out, &place),
        };
        done.map_err(|error| Problem::io(&self.name, WRITING, &error))
    }

    /// Explains an error of [`Write`].
    ///
    /// * `error`: the system's answer
    pub fn problem(&self, error: &io::Error) -> Problem {
        Problem::io(&self.name, WRITING, error)
    }
}

/// What was being done when writing fails.
const WRITING: &str = "cannot write, and nothing was left behind";

impl Write for WholeFile {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        match &mut self.target {
            Target::Beside { out, .. } => out.write(bytes),
            Target::Device(out) => out.write(bytes),
        }
    }

    fn flush(&mut self) -> io::Result<()> {
        match &mut self.target {
            Target::Beside { out, .. } => out.flush(),
            Target::Device(out) => out.flush(),
        }
    }
}

/// Opens a device or a named pipe.
fn device(path: &Path) -> Result<Target, Problem> {
    let opened = OpenOptions::new().write(true).open(path);
    let file = opened.map_err(|error| Problem::io(path.display().to_string(), "cannot open for writing", &error))?;
    Ok(Target::Device(BufWriter::with_capacity(CHUNK, file)))
}

/// Makes a temporary file in the folder of the final place.
fn beside(place: &Path, permissions: Option<fs::Permissions>) -> Result<Target, Problem> {
    let folder = folder_of(place);
    let mut builder = Builder::new();
    builder.prefix(".evenbore-").suffix(".part");
    if let Some(permissions) = permissions.or_else(usual_permissions) {
        builder.permissions(permissions);
    }
    match builder.tempfile_in(folder) {
        Ok(file) => Ok(Target::Beside { out: BufWriter::with_capacity(CHUNK, file), place: place.to_owned() }),
        Err(error) => {
            let action = format!("cannot make a file in the folder {}", folder.display());
            Err(Problem::io(place.display().to_string(), &action, &error))
        }
    }
}

/// Puts a temporary file on the disk and renames it.
fn persist(out: BufWriter<NamedTempFile>, place: &Path) -> io::Result<()> {
    let file = out.into_inner().map_err(|error| error.into_error())?;
    file.as_file().sync_all()?;
    file.persist(place).map_err(|refused| refused.error)?;
    // The new name lives in the folder; systems that cannot open a folder keep it safe by themselves.
    let _ = File::open(folder_of(place)).and_then(|folder| folder.sync_all());
    Ok(())
}

/// Folder of a path, the present one for a bare name.
fn folder_of(path: &Path) -> &Path {
    path.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or(Path::new("."))
}

/// What a new file may usually be used for; the system takes the user's mask off it.
#[cfg(unix)]
fn usual_permissions() -> Option<fs::Permissions> {
    use std::os::unix::fs::PermissionsExt;
    Some(fs::Permissions::from_mode(0o666))
}

/// What a new file may usually be used for: the system's own choice.
#[cfg(not(unix))]
fn usual_permissions() -> Option<fs::Permissions> {
    None
}
