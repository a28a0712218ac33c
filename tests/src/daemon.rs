//! The real program, built as it is and run as an operator would.

use std::env;
use std::fs::{self, File};
use std::path::{Path, PathBuf};
use std::process::{Child, Command, ExitStatus, Output};
use std::sync::OnceLock;

use crate::{SOON, folder, wait};

/// A running `humward run`; ended when dropped.
#[derive(Debug)]
pub struct Daemon {
    child: Child,
    log: PathBuf,
}

impl Daemon {
    /// Starts it on this configuration.
    pub fn start(config: &str) -> Self {
        let folder = folder("daemon");
        let (path, log) = (folder.join("site.toml"), folder.join("log"));
        fs::write(&path, config).expect("the folder takes a file");
        let stderr = File::create(&log).expect("the folder takes a log");
        let child = command("run")
            .arg(&path)
            .stderr(stderr)
            .spawn()
            .expect("the program starts");
        Self { child, log }
    }

    /// What it has logged so far.
    pub fn log(&self) -> String {
        fs::read_to_string(&self.log).unwrap_or_default()
    }

    /// Waits until it has logged this.
    pub fn wait_for_log(&self, text: &str) {
        wait(
            &format!("{text:?} in the log:\n{}", self.log()),
            SOON,
            || self.log().contains(text).then_some(()),
        );
    }

    /// Asks it to stop and waits until it has.
    pub fn stop(mut self) -> ExitStatus {
        self.signal("TERM");
        wait("humward to stop on SIGTERM", SOON, || {
            self.child.try_wait().expect("our own child can be asked")
        })
    }

    /// Ends it at once, as a crash would.
    pub fn kill(mut self) {
        self.child.kill().expect("our own child can be ended");
        self.child.wait().expect("our own child can be waited for");
    }

    /// Whether it is still running.
    pub fn runs(&mut self) -> bool {
        self.child
            .try_wait()
            .expect("our own child can be asked")
            .is_none()
    }

    fn signal(&self, name: &str) {
        let done = Command::new("kill")
            .arg(format!("-{name}"))
            .arg(self.child.id().to_string())
            .status();
        assert!(
            done.expect("kill starts").success(),
            "the signal reaches our own child"
        );
    }
}

impl Drop for Daemon {
    fn drop(&mut self) {
        if self.runs() {
            self.child.kill().expect("our own child can be ended");
            self.child.wait().expect("our own child can be waited for");
        }
    }
}

/// The program with nothing of ours in its environment but what a test gives it.
fn command(name: &str) -> Command {
    let mut command = Command::new(program());
    command.arg(name);
    for (variable, _) in env::vars_os() {
        if variable.to_string_lossy().starts_with("HUMWARD_") {
            command.env_remove(variable);
        }
    }
    command
}

/// Rehearses recordings under a configuration.
pub fn rehearse(config: &str, recordings: &[&Path]) -> Output {
    let path = folder("rehearse").join("site.toml");
    fs::write(&path, config).expect("the folder takes a file");
    command("rehearse")
        .arg(&path)
        .args(recordings)
        .output()
        .expect("the program starts")
}

/// The program, built once per test run from the sources as they are; `HUMWARD_PROGRAM` names one that was.
pub fn program() -> &'static Path {
    static PROGRAM: OnceLock<PathBuf> = OnceLock::new();
    PROGRAM.get_or_init(|| {
        if let Some(built) = env::var_os("HUMWARD_PROGRAM") {
            return PathBuf::from(built);
        }
        let test = env::current_exe().expect("a test knows where it is");
        // <target>/<profile>/deps/<test>
        let profile = test
            .ancestors()
            .nth(2)
            .expect("tests lie in target/<profile>/deps")
            .to_owned();
        let target = profile
            .parent()
            .expect("a profile lies in the target folder");
        let cargo = env::var_os("CARGO").unwrap_or_else(|| "cargo".into());
        let mut build = Command::new(cargo);
        build
            .args([
                "build",
                "--quiet",
                "-p",
                "humward",
                "--bin",
                "humward",
                "--target-dir",
            ])
            .arg(target);
        if profile.ends_with("release") {
            build.arg("--release");
        }
        build.current_dir(env!("CARGO_MANIFEST_DIR"));
        assert!(
            build.status().expect("cargo starts").success(),
            "humward builds"
        );
        profile.join("humward")
    })
}
