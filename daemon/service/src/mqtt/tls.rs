//! Whom the broker connections trust: the machine's own store, or one file of certificates.

use std::path::{Path, PathBuf};
use std::sync::Arc;

use rustls::pki_types::CertificateDer;
use rustls::pki_types::pem::PemObject;
use rustls::{ClientConfig, RootCertStore};

/// Why TLS cannot be set up.
#[derive(Debug, thiserror::Error)]
pub enum TlsFault {
    /// The file of certificates cannot be read as PEM.
    #[error("{}: {cause}; give a readable PEM file of CA certificates in ca_file", path.display())]
    CaFile {
        /// The file.
        path: PathBuf,
        /// What went wrong.
        cause: String,
    },
    /// No certificate to trust was found.
    #[error("no CA certificate found {place}; install the system's certificates or set ca_file")]
    NoCertificates {
        /// Where was looked.
        place: String,
    },
    /// The TLS library cannot work here.
    #[error("TLS cannot be used: {0}; check the installation")]
    Library(#[from] rustls::Error),
}

/// The client side of TLS 1.2 and 1.3, trusting `ca_file` if given, else the machine's store.
///
/// # Errors
/// [`TlsFault`]: nothing to trust, or a file that cannot be read.
pub fn client(ca_file: Option<&Path>) -> Result<Arc<ClientConfig>, TlsFault> {
    let mut roots = RootCertStore::empty();
    let place = match ca_file {
        Some(path) => {
            let fault = |cause: String| TlsFault::CaFile {
                path: path.to_owned(),
                cause,
            };
            for certificate in
                CertificateDer::pem_file_iter(path).map_err(|e| fault(e.to_string()))?
            {
                let certificate = certificate.map_err(|e| fault(e.to_string()))?;
                roots.add(certificate).map_err(|e| fault(e.to_string()))?;
            }
            format!("in {}", path.display())
        }
        None => {
            let found = rustls_native_certs::load_native_certs();
            for error in &found.errors {
                tracing::warn!("system certificates: {error}");
            }
            roots.add_parsable_certificates(found.certs);
            "in the system's store".to_owned()
        }
    };
    if roots.is_empty() {
        return Err(TlsFault::NoCertificates { place });
    }
    let provider = Arc::new(rustls::crypto::ring::default_provider());
    let config = ClientConfig::builder_with_provider(provider)
        .with_safe_default_protocol_versions()?
        .with_root_certificates(roots)
        .with_no_client_auth();
    Ok(Arc::new(config))
}

#[cfg(test)]
mod tests {
    use std::path::Path;

    use super::client;

    #[test]
    fn a_missing_ca_file_is_named_with_its_remedy() {
        let fault = client(Some(Path::new("/nowhere/ca.pem"))).expect_err("there is no such file");
        let text = fault.to_string();
        assert!(
            text.contains("/nowhere/ca.pem") && text.contains("ca_file"),
            "{text}"
        );
    }
}
