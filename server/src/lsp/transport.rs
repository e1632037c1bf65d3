//! Messages in and out: the loop around the service.
//!
//! The library's own loop ends at the first message that is no JSON, so this one takes its place. Every request is begun
//! in the order of arrival, before the next message is looked at; what it then waits for it waits for by itself.

use super::frames::{Frame, Frames};
use futures::{FutureExt, SinkExt, StreamExt};
use serde_json::{Value, json};
use std::panic::AssertUnwindSafe;
use std::time::Duration;
use tokio::io::{AsyncRead, AsyncReadExt, AsyncWrite, AsyncWriteExt};
use tokio::sync::mpsc;
use tower::Service;
use tower_lsp::jsonrpc::{Error, ErrorCode, Id, Request, Response};
use tower_lsp::{ClientSocket, LanguageServer, LspService};

/// Messages that may wait for a client that does not read.
const WAITING: usize = 1024;
/// How long what is under way may still be answered after the end.
const GRACE: Duration = Duration::from_millis(500);

/// How the conversation ended.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum End {
    /// With `exit`.
    Exit,
    /// The input ended.
    Input,
}

/// Talks until the end.
pub async fn serve<S: LanguageServer>(
    mut input: impl AsyncRead + Unpin,
    output: impl AsyncWrite + Unpin + Send + 'static,
    mut service: LspService<S>,
    socket: ClientSocket,
) -> End {
    let (out, queue) = mpsc::channel::<Vec<u8>>(WAITING);
    let writer = tokio::spawn(write(output, queue));
    let (mut asked, mut replies) = socket.split();
    let forward = out.clone();
    let asking = tokio::spawn(async move {
        while let Some(request) = asked.next().await {
            if forward.send(frame(&request)).await.is_err() {
                break;
            }
        }
    });
    let mut frames = Frames::default();
    let mut chunk = vec![0; 64 << 10];
    let end = 'talk: loop {
        while let Some(frame) = frames.next() {
            let message = match frame {
                Frame::Message(message) => message,
                Frame::Broken(what) => {
                    let error = Error { code: ErrorCode::ParseError, message: what.into(), data: None };
                    answer(&out, &Response::from_error(Id::Null, error));
                    continue;
                }
            };
            if message.get("method").is_none() {
                // A reply, if anything; what it replies to is the library's to know.
                match serde_json::from_value::<Response>(message) {
                    Ok(reply) => drop(replies.send(reply).await),
                    Err(_) => answer(&out, &Response::from_error(Id::Null, Error::invalid_request())),
                }
                continue;
            }
            if message.get("method").and_then(Value::as_str) == Some("exit") {
                break 'talk End::Exit;
            }
            let id = message.get("id").cloned();
            let Ok(request) = serde_json::from_value::<Request>(message) else {
                let id = id.and_then(|id| serde_json::from_value(id).ok()).unwrap_or(Id::Null);
                answer(&out, &Response::from_error(id, Error::invalid_request()));
                continue;
            };
            begin(&mut service, request, &out).await;
        }
        match input.read(&mut chunk).await {
            Ok(0) | Err(_) => break End::Input,
            Ok(n) => frames.feed(&chunk[..n]),
        }
    };
    asking.abort();
    drop(out);
    // What is done is still told; what is not ends with the process.
    let _ = tokio::time::timeout(GRACE, writer).await;
    end
}

/// Begins to serve a request, in the order of arrival. What it waits for, it waits for in a task of its own.
async fn begin<S: LanguageServer>(service: &mut LspService<S>, request: Request, out: &mpsc::Sender<Vec<u8>>) {
    let id = request.id().cloned();
    let failed = move || id.map(|id| Response::from_error(id, Error::internal_error()));
    if futures::future::poll_fn(|cx| service.poll_ready(cx)).await.is_err() {
        return;
    }
    let mut work = AssertUnwindSafe(service.call(request)).catch_unwind().boxed();
    let done = futures::future::poll_fn(|cx| std::task::Poll::Ready(work.poll_unpin(cx))).await;
    let response = |result| match result {
        Ok(Ok(response)) => response,
        Ok(Err(_)) => None,
        Err(_) => failed(),
    };
    match done {
        std::task::Poll::Ready(result) => {
            if let Some(response) = response(result) {
                answer(out, &response);
            }
        }
        std::task::Poll::Pending => {
            let out = out.clone();
            tokio::spawn(async move {
                if let Some(response) = response(work.await) {
                    let _ = out.send(frame(&response)).await;
                }
            });
        }
    }
}

/// Sends an answer without waiting: reading goes on even where the client is slow to read.
fn answer(out: &mpsc::Sender<Vec<u8>>, response: &Response) {
    if let Err(mpsc::error::TrySendError::Full(bytes)) = out.try_send(frame(response)) {
        let out = out.clone();
        tokio::spawn(async move { out.send(bytes).await });
    }
}

fn frame(message: &impl serde::Serialize) -> Vec<u8> {
    let body = serde_json::to_vec(message).unwrap_or_else(|_| json!(null).to_string().into_bytes());
    let mut bytes = format!("Content-Length: {}\r\n\r\n", body.len()).into_bytes();
    bytes.extend(body);
    bytes
}

async fn write(mut output: impl AsyncWrite + Unpin, mut queue: mpsc::Receiver<Vec<u8>>) {
    while let Some(bytes) = queue.recv().await {
        if output.write_all(&bytes).await.is_err() {
            return;
        }
        // A burst is written in one go.
        while let Ok(bytes) = queue.try_recv() {
            if output.write_all(&bytes).await.is_err() {
                return;
            }
        }
        if output.flush().await.is_err() {
            return;
        }
    }
}
