//! Mosquitto of the test's own, on a free port of 127.0.0.1.

use std::fs::{self, File};
use std::net::{TcpListener, TcpStream};
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};

use crate::{SOON, folder, wait};

/// A running broker; ended when dropped.
#[derive(Debug)]
pub struct Broker {
    folder: PathBuf,
    port: u16,
    child: Option<Child>,
}

impl Broker {
    /// Starts one that lets everybody in.
    pub fn start() -> Self {
        Self::with("")
    }

    /// Starts one with further lines in its configuration; when its port was taken meanwhile, on another.
    pub fn with(lines: &str) -> Self {
        let mut broker = Self::prepare(Self::free_port(), lines);
        for _ in 0..5 {
            match broker.launch() {
                Ok(()) => return broker,
                Err(log) if log.contains("Address already in use") => {
                    broker = Self::prepare(Self::free_port(), lines);
                }
                Err(log) => panic!("mosquitto ended: {log}"),
            }
        }
        panic!("no port of 127.0.0.1 stays free");
    }

    /// A port nobody listens on; it may be taken before it is used, and then the broker does not come up.
    pub fn free_port() -> u16 {
        TcpListener::bind("127.0.0.1:0")
            .and_then(|listener| listener.local_addr())
            .expect("127.0.0.1 has a free port")
            .port()
    }

    /// Starts one on this port with further lines in its configuration.
    pub fn on(port: u16, lines: &str) -> Self {
        let mut broker = Self::prepare(port, lines);
        broker.restart();
        broker
    }

    fn prepare(port: u16, lines: &str) -> Self {
        let folder = folder("broker");
        let text = format!(
            "allow_anonymous true\nset_tcp_nodelay true\npersistence false\nmax_inflight_messages 0\n\
             max_queued_messages 100000\nlog_dest stderr\nlistener {port} 127.0.0.1\n{lines}"
        );
        fs::write(folder.join("mosquitto.conf"), text).expect("the folder takes a file");
        Self {
            folder,
            port,
            child: None,
        }
    }

    /// Its port.
    pub const fn port(&self) -> u16 {
        self.port
    }

    /// Starts it again on its port, with nothing remembered.
    pub fn restart(&mut self) {
        self.stop();
        if let Err(log) = self.launch() {
            panic!("mosquitto ended: {log}");
        }
    }

    /// Starts the program and waits until it listens; its log when it ended instead.
    fn launch(&mut self) -> Result<(), String> {
        let path = self.folder.join("log");
        let log = File::options()
            .create(true)
            .append(true)
            .open(&path)
            .expect("the folder takes a log");
        let child = Command::new(program())
            .arg("-c")
            .arg(self.folder.join("mosquitto.conf"))
            .stdout(Stdio::null())
            .stderr(log)
            .spawn()
            .expect("mosquitto starts; on Debian: apt-get install mosquitto");
        let child = self.child.insert(child);
        let address = ("127.0.0.1", self.port);
        wait("mosquitto to listen", SOON, || {
            match child.try_wait().expect("our own child can be asked") {
                Some(_) => Some(Err(fs::read_to_string(&path).unwrap_or_default())),
                None => TcpStream::connect(address).ok().map(|_| Ok(())),
            }
        })
    }

    /// Ends it at once, as a crash would.
    pub fn stop(&mut self) {
        if let Some(mut child) = self.child.take() {
            child.kill().expect("our own child can be ended");
            child.wait().expect("our own child can be waited for");
        }
    }
}

impl Drop for Broker {
    fn drop(&mut self) {
        self.stop();
    }
}

fn program() -> PathBuf {
    let usual = Path::new("/usr/sbin/mosquitto");
    if usual.exists() {
        usual.to_owned()
    } else {
        PathBuf::from("mosquitto")
    }
}
