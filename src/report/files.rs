//! Files are written whole or not at all: into a temporary file of the same folder, then renamed over the old one.

use std::fmt;
use std::fs;
use std::io::{self, Write};
use std::path::{Path, PathBuf};

/// Why a file or folder could not be written; exit code 4.
#[derive(Debug)]
pub struct FileError {
    /// The file or folder.
    pub path: PathBuf,
    /// What was being done: `write`, `create the folder`.
    pub doing: &'static str,
    /// The system's reason.
    pub cause: io::Error,
}

impl fmt::Display for FileError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            out,
            "could not {} `{}`: {}",
            self.doing,
            self.path.display(),
            self.cause
        )
    }
}

impl std::error::Error for FileError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        Some(&self.cause)
    }
}

/// Makes sure that an output folder is there, parents included.
pub fn folder(path: &Path) -> Result<(), FileError> {
    fs::create_dir_all(path).map_err(|cause| FileError {
        path: path.to_path_buf(),
        doing: "create the folder",
        cause,
    })
}

/// Writes a whole file, replacing an older one. After an error the old file is untouched and nothing is left over.
/// A link is followed; a device or a pipe cannot be replaced and is written to as it is.
pub fn write(path: &Path, contents: &[u8]) -> Result<(), FileError> {
    let failed = |cause| FileError {
        path: path.to_path_buf(),
        doing: "write",
        cause,
    };
    match fs::metadata(path) {
        Ok(old) if old.is_dir() => Err(failed(io::Error::new(
            io::ErrorKind::IsADirectory,
            "it is a folder",
        ))),
        Ok(old) if old.is_file() => {
            let real = fs::canonicalize(path).map_err(failed)?;
            replace(&real, contents, Some(old.permissions())).map_err(failed)
        }
        Ok(_) => fs::OpenOptions::new()
            .write(true)
            .open(path)
            .and_then(|mut it| it.write_all(contents))
            .map_err(failed),
        Err(_) => replace(path, contents, None).map_err(failed),
    }
}

/// Writes beside `path` and renames. `rights` are those of the file that is replaced; a new one gets what any new
/// file would, since the private rights of a temporary file would hide results from colleagues.
fn replace(path: &Path, contents: &[u8], rights: Option<fs::Permissions>) -> io::Result<()> {
    let beside = match path.parent() {
        Some(parent) if !parent.as_os_str().is_empty() => parent,
        _ => Path::new("."),
    };
    let mut builder = tempfile::Builder::new();
    builder.prefix(".writing-");
    #[cfg(unix)]
    builder.permissions(std::os::unix::fs::PermissionsExt::from_mode(0o666));
    let mut file = builder.tempfile_in(beside)?;
    file.write_all(contents)?;
    if let Some(rights) = rights {
        file.as_file().set_permissions(rights)?;
    }
    file.as_file().sync_all()?;
    file.persist(path).map(drop).map_err(|error| error.error)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn names(folder: &Path) -> Vec<String> {
        let mut names: Vec<String> = fs::read_dir(folder)
            .expect("readable")
            .map(|entry| {
                entry
                    .expect("entry")
                    .file_name()
                    .to_string_lossy()
                    .into_owned()
            })
            .collect();
        names.sort();
        names
    }

    #[test]
    fn a_file_is_written_replaced_and_alone() {
        let place = tempfile::tempdir().expect("a folder");
        let out = place.path().join("deep/er");
        folder(&out).expect("made");
        folder(&out).expect("again is fine");
        let file = out.join("kick.csv");
        write(&file, b"one").expect("written");
        write(&file, b"two").expect("replaced");
        assert_eq!(fs::read(&file).expect("read"), b"two");
        assert_eq!(names(&out), ["kick.csv"]);
    }

    #[test]
    fn an_error_names_the_path_and_leaves_nothing() {
        let place = tempfile::tempdir().expect("a folder");
        let missing = place.path().join("no/such/kick.csv");
        let error = write(&missing, b"x").expect_err("no folder");
        assert!(error.to_string().contains("kick.csv"), "{error}");
        let taken = place.path().join("taken");
        fs::create_dir(&taken).expect("made");
        assert!(write(&taken, b"x").is_err());
        let file = place.path().join("file");
        write(&file, b"x").expect("written");
        let error = folder(&file.join("below")).expect_err("a file is in the way");
        assert!(
            error.to_string().starts_with("could not create the folder"),
            "{error}"
        );
        assert_eq!(names(place.path()), ["file", "taken"]);
    }

    #[cfg(unix)]
    #[test]
    fn rights_are_those_of_any_new_file_and_are_kept() {
        use std::os::unix::fs::PermissionsExt;
        let place = tempfile::tempdir().expect("a folder");
        let file = place.path().join("kick.csv");
        write(&file, b"x").expect("written");
        let mode = |file: &Path| fs::metadata(file).expect("there").permissions().mode() & 0o777;
        let ordinary = place.path().join("ordinary");
        fs::write(&ordinary, b"x").expect("written");
        assert_eq!(mode(&file), mode(&ordinary));
        fs::set_permissions(&file, fs::Permissions::from_mode(0o600)).expect("set");
        write(&file, b"y").expect("written");
        assert_eq!(mode(&file), 0o600);
    }

    #[cfg(unix)]
    #[test]
    fn links_are_followed_and_pipes_stay_pipes() {
        let place = tempfile::tempdir().expect("a folder");
        let (file, link) = (
            place.path().join("kick.csv"),
            place.path().join("latest.csv"),
        );
        write(&file, b"one").expect("written");
        std::os::unix::fs::symlink(&file, &link).expect("linked");
        write(&link, b"two").expect("written");
        assert_eq!(fs::read(&file).expect("read"), b"two");
        assert!(fs::symlink_metadata(&link).expect("there").is_symlink());

        let pipe = place.path().join("pipe");
        let made = std::process::Command::new("mkfifo")
            .arg(&pipe)
            .status()
            .expect("every Unix has mkfifo");
        assert!(made.success());
        let reader = std::thread::spawn({
            let pipe = pipe.clone();
            move || fs::read(pipe).expect("read")
        });
        write(&pipe, b"through").expect("written");
        assert_eq!(reader.join().expect("ended"), b"through");
    }
}
