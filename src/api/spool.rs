//! A body on its way in: written beside the database, since a file may be larger than memory,
//! and hashed as it passes by.

use std::io;
use std::path::{Path, PathBuf};

use axum::body::Bytes;
use axum::extract::{FromRequest, Multipart, Request};
use futures_util::{Stream, StreamExt};
use sha2::{Digest, Sha256};
use tokio::io::AsyncWriteExt;

use super::http::{EXPORT_BYTES_MAX, Failure, media_type, unreadable_body};
use crate::answers::ProblemKind;
use crate::store::new_id;

/// A body on the disk. The file goes with it.
#[derive(Debug)]
pub struct Spool {
    path: PathBuf,
    /// `sha256:` and the hex digest of the body as decoded.
    pub digest: String,
    /// File name that the body itself gives.
    pub file: Option<String>,
}

/// Deletes the file, whatever becomes of the request.
struct Temporary(PathBuf);

impl Drop for Temporary {
    fn drop(&mut self) {
        // It may not exist yet; a file left behind is only in the way.
        let _ = std::fs::remove_file(&self.0);
    }
}

impl Drop for Spool {
    fn drop(&mut self) {
        drop(Temporary(std::mem::take(&mut self.path)));
    }
}

impl Spool {
    /// Takes the body of a request, or the one part of a form, to the folder.
    pub async fn take(request: Request, folder: &Path) -> Result<Self, Failure> {
        let media = media_type(request.headers());
        if media == "multipart/form-data" {
            return Self::part(request, folder).await;
        }
        accepted(&media)?;
        let chunks =
            request.into_body().into_data_stream().map(|c| c.map_err(|e| unreadable_body(&e)));
        Self::write(chunks, folder, None).await
    }

    async fn part(request: Request, folder: &Path) -> Result<Self, Failure> {
        let form = |e: &dyn std::error::Error| unreadable_body(e);
        let mut parts = Multipart::from_request(request, &()).await.map_err(|e| form(&e))?;
        let one = || ProblemKind::Invalid.problem("A form must hold one part, the file itself.");
        let part = parts.next_field().await.map_err(|e| form(&e))?.ok_or_else(one)?;
        let name = part.file_name().map(str::to_owned);
        let chunks = part.map(|c| c.map_err(|e| unreadable_body(&e)));
        let spool = Self::write(chunks, folder, name).await?;
        match parts.next_field().await.map_err(|e| form(&e))? {
            None => Ok(spool),
            Some(_) => Err(one().into()),
        }
    }

    async fn write(
        chunks: impl Stream<Item = Result<Bytes, Failure>>,
        folder: &Path,
        file: Option<String>,
    ) -> Result<Self, Failure> {
        let temporary = Temporary(folder.join(format!("{}.spool", new_id())));
        let mut out = tokio::fs::File::create_new(&temporary.0).await.map_err(|e| no_room(&e))?;
        let (mut hash, mut bytes) = (Sha256::new(), 0);
        let mut chunks = std::pin::pin!(chunks);
        while let Some(chunk) = chunks.next().await {
            let chunk = chunk?;
            bytes += chunk.len();
            if bytes > EXPORT_BYTES_MAX {
                return Err(ProblemKind::TooLarge
                    .problem(format!(
                        "A file may hold {EXPORT_BYTES_MAX} bytes as decoded; send it in parts."
                    ))
                    .into());
            }
            hash.update(&chunk);
            out.write_all(&chunk).await.map_err(|e| no_room(&e))?;
        }
        out.flush().await.map_err(|e| no_room(&e))?;
        let hex: String = hash.finalize().iter().map(|b| format!("{b:02x}")).collect();
        let path = temporary.0.clone();
        // From here on the spool itself deletes it.
        std::mem::forget(temporary);
        Ok(Self { path, digest: format!("sha256:{hex}"), file })
    }

    /// Opens it for reading.
    pub fn open(&self) -> io::Result<std::fs::File> {
        std::fs::File::open(&self.path)
    }
}

/// Kinds of body that can be an export. A form's name is what curl gives to `--data-binary`.
fn accepted(media: &str) -> Result<(), Failure> {
    const TAKEN: [&str; 5] = [
        "",
        "text/csv",
        "text/plain",
        "application/octet-stream",
        "application/x-www-form-urlencoded",
    ];
    if TAKEN.contains(&media) {
        return Ok(());
    }
    let detail = match media {
        "application/json" => {
            "Post readings in JSON to /v1/readings; a file is taken here.".to_owned()
        }
        "application/gzip" | "application/x-gzip" | "application/zstd" => {
            "Send a packed file with Content-Type: text/csv and Content-Encoding: gzip or zstd."
                .to_owned()
        }
        _ => format!("A body of the kind `{media}` is not taken; send the file as text/csv."),
    };
    Err(ProblemKind::UnsupportedMediaType.problem(detail).into())
}

fn no_room(error: &io::Error) -> Failure {
    tracing::error!(%error, "a body could not be spooled");
    if error.kind() == io::ErrorKind::StorageFull {
        let detail = "The disk is full; nothing was stored. Free some space and post it again.";
        return ProblemKind::DiskFull.problem(detail).into();
    }
    let detail = "The file could not be written to the disk of the service; its log says why.";
    ProblemKind::Internal.problem(detail).into()
}
