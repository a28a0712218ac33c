//! A scenario as a recording: header with the truth, then every message in order of arrival.
//!
//! In: a world and the truth of its scenario. Out: a file in the daemon's own format (a CBOR sequence), written beside
//! its final name and renamed when it is whole, so a file of that name is never half a recording. A file that is
//! there already stays unless replacing it is asked for. Memory does not grow with the recording.

use std::fs::{self, File};
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};

use humward_wire::id::{Id, IdFault};
use humward_wire::recording::{Header, Record, header, record};

use crate::transport::Delivery;
use crate::truth::Truth;

/// Why there is no recording.
#[derive(Debug, thiserror::Error)]
pub enum RenderFault {
    /// A file of that name is there.
    #[error("{} is there already; give another name, or --replace to write over it", path.display())]
    Exists {
        /// The file.
        path: PathBuf,
    },
    /// The file cannot be written.
    #[error("{} cannot be written: {cause}; check folder, permissions and space", path.display())]
    Write {
        /// The file.
        path: PathBuf,
        /// Why.
        #[source]
        cause: io::Error,
    },
    /// The truth does not go into text.
    #[error(
        "the truth of the scenario cannot be written as JSON: {cause}; look for a number that is none"
    )]
    Truth {
        /// Why.
        #[source]
        cause: serde_json::Error,
    },
    /// The site is no id; a checked scenario's is.
    #[error("site {site:?}: {cause}")]
    Site {
        /// The site.
        site: String,
        /// Why.
        #[source]
        cause: IdFault,
    },
}

/// What is to be written, and where.
#[derive(Debug)]
pub struct Target<'a> {
    /// The file.
    pub path: &'a Path,
    /// Whether one of that name may be replaced.
    pub replace: bool,
    /// Site in the header.
    pub site: &'a str,
    /// Root of the topics in the header.
    pub root: &'a str,
    /// What is injected.
    pub truth: &'a Truth,
}

/// What was written.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Written {
    /// Messages.
    pub messages: u64,
    /// Bytes of the whole file.
    pub bytes: u64,
}

/// Writes the deliveries, which come in order of arrival, as a recording.
///
/// # Errors
/// [`RenderFault`]; nothing of ours is left under the file's name then.
pub fn render(
    deliveries: impl Iterator<Item = Delivery>,
    target: &Target<'_>,
) -> Result<Written, RenderFault> {
    if target.path.exists() && !target.replace {
        return Err(RenderFault::Exists {
            path: target.path.to_owned(),
        });
    }
    let first = header(&Header {
        site: Id::new(target.site).map_err(|cause| RenderFault::Site {
            site: target.site.to_owned(),
            cause,
        })?,
        root: Some(target.root.to_owned()),
        config_hash: None,
        epoch: None,
        truth: Some(
            serde_json::to_string(target.truth).map_err(|cause| RenderFault::Truth { cause })?,
        ),
    });
    let mut beside = target.path.as_os_str().to_owned();
    beside.push(format!(".{}.part", std::process::id()));
    let beside = PathBuf::from(beside);
    let written = write(&beside, &first, deliveries)
        .and_then(|written| fs::rename(&beside, target.path).map(|()| written));
    written.map_err(|cause| {
        // The file may not even have come about; what went wrong first is what is told.
        drop(fs::remove_file(&beside));
        RenderFault::Write {
            path: target.path.to_owned(),
            cause,
        }
    })
}

fn write(
    path: &Path,
    first: &[u8],
    deliveries: impl Iterator<Item = Delivery>,
) -> io::Result<Written> {
    let mut file = BufWriter::with_capacity(1 << 18, File::create_new(path)?);
    file.write_all(first)?;
    let mut written = Written {
        messages: 0,
        bytes: first.len() as u64,
    };
    for delivery in deliveries {
        let item = record(&Record::Message {
            arrival: delivery.arrival_ns,
            topic: &delivery.topic,
            payload: &delivery.payload,
        });
        file.write_all(&item)?;
        written.messages += 1;
        written.bytes += item.len() as u64;
    }
    let file = file.into_inner().map_err(io::IntoInnerError::into_error)?;
    file.sync_all()?;
    Ok(written)
}
