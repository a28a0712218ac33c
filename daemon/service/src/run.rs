//! `humward run`: puts the parts together and takes them apart again.
//!
//! Threads: one per worker, one keeper of messages, one for the connections and the intake. On SIGINT or SIGTERM
//! in order: the ingest connection closes, the intake empties, the workers finish what they hold, the last
//! messages are kept, `offline` is published and acknowledged, then the publish connection says goodbye.

use std::collections::BTreeMap;
use std::future::Future;
use std::io::{self, IsTerminal as _};
use std::sync::Arc;
use std::sync::mpsc::SyncSender;
use std::thread::JoinHandle;
use std::time::Duration;

use humward_wire::out::{GatewayEventKind, Message as _};
use tokio::sync::{mpsc, watch};

use crate::clock::{Clock, pause};
use crate::commit::{Committer, Outcome, channel};
use crate::config::Loaded;
use crate::exit::Exit;
use crate::gateway::{Book, Constants, Told};
use crate::intake::Intake;
use crate::mailbox::Mailbox;
use crate::mqtt::ingest::Ingest;
use crate::mqtt::publish::{Publish, Will};
use crate::mqtt::tls::TlsFault;
use crate::outbox::{Memory, Shared};
use crate::setup;
use crate::worker::{Letter, Worker};

/// Messages between the ingest connection and the intake.
const HANDED_ON: usize = 64;
/// How long a clean stop may take to deliver what is left.
const LAST_WORDS: Duration = Duration::from_secs(10);
/// How often it is looked whether every worker still works.
const LOOK: Duration = Duration::from_secs(1);

/// Why the daemon cannot run or go on.
#[derive(Debug, thiserror::Error)]
pub enum RunError {
    /// TLS cannot be set up.
    #[error(transparent)]
    Tls(#[from] TlsFault),
    /// The operating system refuses a thread, a timer or a signal.
    #[error("the system refuses {what}: {cause}; raise its limits")]
    System {
        /// What was asked for.
        what: &'static str,
        /// Its answer.
        cause: io::Error,
    },
    /// A part of the daemon ended by itself, which is a fault in it; a restart begins afresh.
    #[error(
        "{part} ended by itself, and with it the watch; the log above says why, restart the daemon"
    )]
    PartEnded {
        /// Which part.
        part: &'static str,
    },
}

impl RunError {
    /// How the command ends over it.
    pub const fn exit(&self) -> Exit {
        match self {
            Self::Tls(_) => Exit::ReadWrite,
            Self::System { .. } | Self::PartEnded { .. } => Exit::Internal,
        }
    }
}

/// Starts the log: lines on stderr, `info` and above unless `HUMWARD_LOG` says otherwise.
pub fn log() {
    use tracing_subscriber::EnvFilter;
    let filter = EnvFilter::try_from_env("HUMWARD_LOG").unwrap_or_else(|_| EnvFilter::new("info"));
    let started = tracing_subscriber::fmt()
        .with_env_filter(filter)
        .with_writer(io::stderr)
        .with_target(false)
        .with_ansi(io::stderr().is_terminal())
        .try_init();
    if started.is_err() {
        tracing::debug!("the log had been started before");
    }
}

/// Runs the daemon until SIGINT or SIGTERM.
///
/// # Errors
/// [`RunError`]; a broker that is away or refuses us is no error but waited for.
pub fn run(config: Loaded) -> Result<(), RunError> {
    runtime()?.block_on(async {
        let stop = signal().map_err(|cause| RunError::System {
            what: "signals",
            cause,
        })?;
        serve(config, Clock::new(), stop).await
    })
}

/// The runtime the connections live in: one thread.
///
/// # Errors
/// The operating system refuses it.
pub fn runtime() -> Result<tokio::runtime::Runtime, RunError> {
    tokio::runtime::Builder::new_current_thread()
        .enable_all()
        .build()
        .map_err(|cause| RunError::System {
            what: "a runtime",
            cause,
        })
}

fn signal() -> Result<impl Future<Output = ()>, io::Error> {
    use tokio::signal::unix::{SignalKind, signal};
    let mut terminate = signal(SignalKind::terminate())?;
    let mut interrupt = signal(SignalKind::interrupt())?;
    Ok(async move {
        let name = tokio::select! {
            _ = terminate.recv() => "SIGTERM",
            _ = interrupt.recv() => "SIGINT",
        };
        tracing::info!("{name}: stopping");
    })
}

/// Runs the daemon by `clock` until `stop` resolves.
///
/// # Errors
/// As [`run`].
pub async fn serve(
    config: Loaded,
    mut clock: Clock,
    stop: impl Future<Output = ()>,
) -> Result<(), RunError> {
    let settings = setup::settings(&config)?;
    let started = clock.stamp().1.arrival;
    let wanted = match config.gateway().workers() {
        0 => std::thread::available_parallelism().map_or(1, usize::from),
        workers => workers,
    };
    let workers = wanted.min(config.groups().len()).max(1);
    let constants = Constants {
        identity: setup::identity(&config),
        config_hash: config.hash().to_owned(),
        started,
        time_factor: clock.factor(),
    };
    let book = Arc::new(Book::new(constants, workers));
    say_what_is_watched(&config, workers);

    let outbox = Shared::new(Box::new(Memory::new(config.gateway().outbox_bytes())));
    outbox.keep(setup::nothing_open(&config));
    let (to, from) = channel();
    let committer = Committer {
        from,
        outbox: outbox.clone(),
        book: Arc::clone(&book),
        topics: config.topics().clone(),
    };
    let keeper = thread("keeper", move || committer.run())?;
    let (boxes, crew) = hire(&config, workers, &to, &book)?;

    let (stop_ingest, ingest_stopped) = watch::channel(false);
    let (stop_intake, intake_stopped) = watch::channel(false);
    let (finish, finished) = watch::channel(false);
    let (arrived_to, arrived) = mpsc::channel(HANDED_ON);
    let (standing_to, standing) = mpsc::channel(HANDED_ON);
    let client = config.broker().client_id().to_owned();
    let ingest = Ingest {
        settings: settings.clone(),
        client_id: format!("{client}-in"),
        filters: setup::filters(&config),
        to: arrived_to,
        stop: ingest_stopped,
    };
    let will = {
        let (book, topic) = (
            Arc::clone(&book),
            config.topics().gateway(config.gateway().id()),
        );
        // The will is said when we can no longer tell when; it carries the time of the connection it ends.
        move || Will {
            topic: topic.clone(),
            payload: book.offline(book.last_stamp()).to_json(),
        }
    };
    let publish = Publish {
        settings,
        client_id: format!("{client}-out"),
        outbox: outbox.clone(),
        will: Box::new(will),
        tell: standing_to,
        finish: finished,
    };
    let told = Told::new(
        GatewayEventKind::Started,
        format!("humward {} watches", env!("CARGO_PKG_VERSION")),
    );
    send(&to, Outcome::Told(started, told));
    let intake = Intake::new(
        clock,
        setup::routes(&config),
        boxes,
        Arc::clone(&book),
        to.clone(),
    );
    let ingest = tokio::spawn(ingest.run());
    let intake = tokio::spawn(intake.run(arrived, standing, intake_stopped));
    let publish = tokio::spawn(publish.run());

    let tasks = [
        ("the ingest connection", &ingest),
        ("the publish connection", &publish),
    ];
    let ended = tokio::select! {
        () = stop => None,
        part = lost_part(&crew, &keeper, &tasks, || intake.is_finished()) => Some(part),
    };
    stop_ingest.send_replace(true);
    let ingest_ended = ingest.await;
    stop_intake.send_replace(true);
    let mut clock = intake
        .await
        .map_err(|_| RunError::PartEnded { part: "the intake" })?;
    join(crew, "a worker").await?;
    send(&to, Outcome::Offline(clock.stamp().1.arrival));
    drop(to);
    join(vec![keeper], "the keeper of messages").await?;
    finish.send_replace(true);
    if tokio::time::timeout(LAST_WORDS, publish).await.is_err() {
        let left = outbox.lock().waiting();
        tracing::warn!(
            "stopped with {} messages the broker did not take",
            left.letters + left.states
        );
    }
    match (ended, ingest_ended) {
        (Some(part), _) => Err(RunError::PartEnded { part }),
        (None, Err(_)) => Err(RunError::PartEnded {
            part: "the ingest connection",
        }),
        (None, Ok(())) => Ok(()),
    }
}

fn say_what_is_watched(config: &Loaded, workers: usize) {
    for note in config.notes() {
        tracing::info!("{note}");
    }
    let assets: Vec<_> = config
        .groups()
        .iter()
        .flat_map(|group| group.assets())
        .collect();
    let points: usize = assets.iter().map(|asset| asset.spec().points.len()).sum();
    let watches: usize = assets.iter().map(|asset| asset.spec().watches.len()).sum();
    tracing::info!(
        "site {}, gateway {}: watching; assets {}, points {points}, watches {watches}, workers {workers}, configuration {}",
        config.site(),
        config.gateway().id(),
        assets.len(),
        config.hash(),
    );
}

type Boxes = Vec<Arc<Mailbox<Letter>>>;

fn hire(
    config: &Loaded,
    workers: usize,
    to: &SyncSender<Outcome>,
    book: &Arc<Book>,
) -> Result<(Boxes, Vec<JoinHandle<()>>), RunError> {
    let allowed = setup::allowed(config);
    let mut boxes = Vec::new();
    let mut crew = Vec::new();
    for index in 0..workers {
        let mailbox = Arc::new(Mailbox::new(config.gateway().mailbox_bytes()));
        let groups: BTreeMap<_, _> = config
            .groups()
            .iter()
            .enumerate()
            .filter(|(group, _)| group % workers == index)
            .map(|(group, plan)| (group, Arc::clone(plan)))
            .collect();
        let worker = Worker {
            index,
            groups,
            mailbox: Arc::clone(&mailbox),
            to: to.clone(),
            book: Arc::clone(book),
            tolerance: config.gateway().at_tolerance(),
            allowed: Arc::clone(&allowed),
        };
        boxes.push(mailbox);
        crew.push(thread("worker", move || worker.run())?);
    }
    Ok((boxes, crew))
}

fn thread(
    name: &'static str,
    work: impl FnOnce() + Send + 'static,
) -> Result<JoinHandle<()>, RunError> {
    std::thread::Builder::new()
        .name(name.to_owned())
        .spawn(work)
        .map_err(|cause| RunError::System {
            what: "a thread",
            cause,
        })
}

/// Resolves when a thread or task has ended that never should.
async fn lost_part(
    crew: &[JoinHandle<()>],
    keeper: &JoinHandle<()>,
    tasks: &[(&'static str, &tokio::task::JoinHandle<()>)],
    intake_ended: impl Fn() -> bool,
) -> &'static str {
    loop {
        if let Some((part, _)) = tasks.iter().find(|(_, task)| task.is_finished()) {
            return part;
        }
        if intake_ended() {
            return "the intake";
        }
        if crew.iter().any(JoinHandle::is_finished) {
            return "a worker";
        }
        if keeper.is_finished() {
            return "the keeper of messages";
        }
        pause(LOOK).await;
    }
}

async fn join(threads: Vec<JoinHandle<()>>, part: &'static str) -> Result<(), RunError> {
    let joined = tokio::task::spawn_blocking(move || {
        threads.into_iter().all(|thread| thread.join().is_ok())
    })
    .await;
    if joined.is_ok_and(|all| all) {
        Ok(())
    } else {
        Err(RunError::PartEnded { part })
    }
}

fn send(to: &SyncSender<Outcome>, outcome: Outcome) {
    if to.send(outcome).is_err() {
        tracing::error!("the keeper of messages has ended; an outcome is lost");
    }
}
