//! A terminal at which somebody types answers.

use super::Said;
use rustix::pty::{OpenptFlags, grantpt, openpt, ptsname, unlockpt};
use std::ffi::OsStr;
use std::fs::File;
use std::io::Write;
use std::os::unix::ffi::OsStrExt;
use std::path::Path;
use std::process::{Command, Stdio};

/// Runs the program in `folder` with a terminal as its standard input, at which these lines were typed.
pub(super) fn typed(folder: &Path, arguments: &[&str], lines: &[&str]) -> Said {
    let ours = openpt(OpenptFlags::RDWR | OpenptFlags::NOCTTY | OpenptFlags::CLOEXEC).expect("a terminal");
    grantpt(&ours).expect("ours");
    unlockpt(&ours).expect("ours");
    let name = ptsname(&ours, Vec::new()).expect("it has a name");
    let theirs = File::open(OsStr::from_bytes(name.as_bytes())).expect("the far end");
    let mut ours = File::from(ours);
    for line in lines {
        writeln!(ours, "{line}").expect("typed");
    }
    let output = Command::new(env!("CARGO_BIN_EXE_ebbmark"))
        .current_dir(folder)
        .args(arguments)
        .stdin(Stdio::from(theirs))
        .output()
        .expect("the program starts");
    Said::of(&output)
}
