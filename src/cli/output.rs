//! The output folder: it appears whole or not at all, and nothing is overwritten unasked.

use interstice::error::Error;
use std::fs;
use std::path::{Path, PathBuf};

/// Writes all files into a folder beside `folder`, then renames it into place. An existing folder is replaced only with
/// `replace`, and only if an earlier run wrote it (it holds `recipe.json`).
pub fn write(folder: &Path, files: &[(String, String)], replace: bool) -> Result<(), Error> {
    check(folder, replace)?;
    let partial = beside(folder, "partial");
    let failed = |path: &Path| {
        let path = path.display().to_string();
        move |source| Error::File { action: "cannot write", path, source }
    };
    let written = (|| {
        fs::create_dir_all(&partial).map_err(failed(folder))?;
        for (name, text) in files {
            let path = partial.join(name);
            fs::write(&path, text).map_err(failed(&folder.join(name)))?;
        }
        if folder.exists() {
            let old = beside(folder, "old");
            fs::rename(folder, &old).map_err(failed(folder))?;
            if let Err(source) = fs::rename(&partial, folder) {
                // The former folder comes back before the fault is told.
                let _ = fs::rename(&old, folder);
                return Err(failed(folder)(source));
            }
            return fs::remove_dir_all(&old).map_err(failed(&old));
        }
        fs::rename(&partial, folder).map_err(failed(folder))
    })();
    if written.is_err() {
        let _ = fs::remove_dir_all(&partial);
    }
    written
}

/// Refuses a folder that may not be written, before any work is done.
pub fn check(folder: &Path, replace: bool) -> Result<(), Error> {
    if !folder.exists() {
        return Ok(());
    }
    let path = folder.display().to_string();
    let ours = folder.join("recipe.json").is_file();
    match (replace, ours) {
        (true, true) => Ok(()),
        (false, true) => Err(Error::Exists { path, remedy: ", or give `--replace`" }),
        (_, false) => Err(Error::Exists {
            path,
            remedy: " (it was not written by an earlier run, so `--replace` does not touch it)",
        }),
    }
}

/// Refuses a file that may not be written, before any work is done.
pub fn check_file(path: &Path, replace: bool) -> Result<(), Error> {
    match path.exists() && !replace {
        true => Err(Error::FileExists { path: path.display().to_string() }),
        false => Ok(()),
    }
}

/// Writes a file beside `path`, then renames it into place.
pub fn write_file(path: &Path, text: &str) -> Result<(), Error> {
    let partial = beside(path, "partial");
    let written = fs::write(&partial, text).and_then(|()| fs::rename(&partial, path));
    written.map_err(|source| {
        let _ = fs::remove_file(&partial);
        Error::File { action: "cannot write", path: path.display().to_string(), source }
    })
}

fn beside(folder: &Path, what: &str) -> PathBuf {
    let name = folder.file_name().map_or_else(|| "cells".into(), |n| n.to_string_lossy().into_owned());
    folder.with_file_name(format!(".{name}.{what}-{}", std::process::id()))
}
