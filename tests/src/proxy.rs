//! A proxy in front of the broker that can hold back what the broker says, and cut.

use std::io::{Read, Write};
use std::net::{Shutdown, TcpListener, TcpStream};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex, PoisonError};
use std::thread;

/// A proxy on a free port; lives as long as the test.
#[derive(Debug)]
pub struct Proxy {
    port: u16,
    deaf: Arc<AtomicBool>,
    open: Arc<Mutex<Vec<TcpStream>>>,
}

impl Proxy {
    /// Passes everything on to `to` of 127.0.0.1.
    pub fn start(to: u16) -> Self {
        let listener = TcpListener::bind("127.0.0.1:0").expect("127.0.0.1 has a free port");
        let port = listener
            .local_addr()
            .expect("a bound listener has an address")
            .port();
        let deaf = Arc::new(AtomicBool::new(false));
        let open: Arc<Mutex<Vec<TcpStream>>> = Arc::default();
        thread::spawn({
            let (deaf, open) = (Arc::clone(&deaf), Arc::clone(&open));
            move || {
                for client in listener.incoming().flatten() {
                    let Ok(broker) = TcpStream::connect(("127.0.0.1", to)) else {
                        continue;
                    };
                    pair(client, broker, &deaf, &open);
                }
            }
        });
        Self { port, deaf, open }
    }

    /// Its port.
    pub const fn port(&self) -> u16 {
        self.port
    }

    /// From now on clients whose id ends in `-out` hear nothing from the broker, or everything again.
    pub fn hold_back(&self, hold: bool) {
        self.deaf.store(hold, Ordering::SeqCst);
    }

    /// Cuts every connection.
    pub fn cut(&self) {
        for stream in self
            .open
            .lock()
            .unwrap_or_else(PoisonError::into_inner)
            .drain(..)
        {
            // One side may be gone already.
            drop(stream.shutdown(Shutdown::Both));
        }
    }
}

fn pair(
    client: TcpStream,
    broker: TcpStream,
    deaf: &Arc<AtomicBool>,
    open: &Mutex<Vec<TcpStream>>,
) {
    client.set_nodelay(true).expect("a socket takes options");
    broker.set_nodelay(true).expect("a socket takes options");
    let twin = |stream: &TcpStream| stream.try_clone().expect("a socket has two ends");
    open.lock()
        .unwrap_or_else(PoisonError::into_inner)
        .extend([twin(&client), twin(&broker)]);
    let outgoing = Arc::new(AtomicBool::new(false));
    let (client_in, broker_out) = (twin(&client), twin(&broker));
    let is_out = Arc::clone(&outgoing);
    thread::spawn(move || {
        let mut first = true;
        copy(client_in, broker_out, |bytes| {
            // The first packet is CONNECT; it holds the client id as text.
            if std::mem::take(&mut first) && bytes.windows(4).any(|four| four == b"-out") {
                is_out.store(true, Ordering::SeqCst);
            }
            true
        });
    });
    let deaf = Arc::clone(deaf);
    thread::spawn(move || {
        copy(broker, client, |_| {
            !(outgoing.load(Ordering::SeqCst) && deaf.load(Ordering::SeqCst))
        });
    });
}

fn copy(mut from: TcpStream, mut to: TcpStream, mut pass: impl FnMut(&[u8]) -> bool) {
    let mut buffer = vec![0; 65_536];
    while let Ok(count) = from.read(&mut buffer) {
        if count == 0 || (pass(&buffer[..count]) && to.write_all(&buffer[..count]).is_err()) {
            break;
        }
    }
    // Either side may be gone already.
    drop(to.shutdown(Shutdown::Both));
    drop(from.shutdown(Shutdown::Both));
}
