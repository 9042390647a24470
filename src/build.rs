//! Tells the program which commit it was built from, so that every record can say so.
//!
//! `EBBMARK_BUILD` names the build where there is no repository. Without either the build is `unknown`: an unpacked
//! source archive must not borrow the commit of whatever repository happens to lie around it.

use std::process::Command;

fn main() {
    println!("cargo::rerun-if-env-changed=EBBMARK_BUILD");
    for path in ["src", "Cargo.toml", "Cargo.lock"] {
        println!("cargo::rerun-if-changed={path}");
    }
    for name in ["HEAD", "logs/HEAD"] {
        if let Some(path) = git(&["rev-parse", "--git-path", name]) {
            println!("cargo::rerun-if-changed={path}");
        }
    }
    let build = std::env::var("EBBMARK_BUILD").ok().filter(|build| !build.is_empty()).or_else(commit);
    println!("cargo::rustc-env=EBBMARK_BUILD={}", build.as_deref().unwrap_or("unknown"));
}

/// The commit, marked when files differ from it; `None` when this package is not under version control.
fn commit() -> Option<String> {
    git(&["ls-files", "--error-unmatch", "Cargo.toml"])?;
    git(&["describe", "--always", "--dirty", "--abbrev=12", "--exclude=*"])
}

fn git(arguments: &[&str]) -> Option<String> {
    let output = Command::new("git").args(arguments).output().ok()?;
    let text = String::from_utf8(output.stdout).ok()?;
    output.status.success().then(|| text.trim().to_owned())
}
