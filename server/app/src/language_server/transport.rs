//! The loop between the streams and the service.
//!
//! tower-lsp brings the routing, the states of a session and cancelling; its own loop is not used, since it ends at the
//! first malformed message, knows no limit, and keeps reading after `exit` while standard input is open. The one idea:
//! every message is handed to the service and run up to its first wait before the next one is read, so that what
//! handlers do before they wait happens in the order of the messages, on however many threads.
//!
//! Traps: answers that nobody reads must not pile up, so that each holds a permit until it is written; reading stops
//! when there are no more.

use std::future::{Future, poll_fn};
use std::pin::Pin;
use std::sync::Arc;
use std::task::Poll;
use std::time::Duration;

use futures_util::{SinkExt, StreamExt};
use serde_json::{Value, json};
use tokio::io::{AsyncRead, AsyncWrite, BufReader};
use tokio::sync::{OwnedSemaphorePermit, Semaphore, mpsc};
use tower_lsp::jsonrpc::{Error, ErrorCode, Id, Request, Response};
use tower_lsp::{ClientSocket, LanguageServer, LspService};
use tower_service::Service;

use super::framing::{Frame, FrameReader, LARGEST_MESSAGE, write};

/// So many requests are answered at a time; more wait to be read.
const REQUESTS_AT_ONCE: usize = 256;

/// So many messages of our own wait to be written.
const WAITING_MESSAGES: usize = 64;

/// How long the last answers may take to be written.
const LAST_WORDS: Duration = Duration::from_secs(1);

/// How a session ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Ended {
    /// By `exit` after `shutdown`.
    Properly,
    /// By `exit` alone, or by the end of the stream.
    Abruptly,
}

/// A message on its way out, with the permit of the request that it answers.
type Outgoing = (Vec<u8>, Option<OwnedSemaphorePermit>);

/// After this nothing is written: others may hold the channel open for long.
const END: Outgoing = (Vec::new(), None);

/// What is polled for an answer.
type Answering = Pin<Box<dyn Future<Output = Option<Response>> + Send>>;

/// Serves until the client ends the session.
pub async fn serve<S: LanguageServer>(
    input: impl AsyncRead + Unpin,
    output: impl AsyncWrite + Unpin + Send + 'static,
    service: LspService<S>,
    socket: ClientSocket,
) -> Ended {
    let (outgoing, written) = mpsc::channel(REQUESTS_AT_ONCE + WAITING_MESSAGES);
    let writer = tokio::spawn(write_all(output, written));
    let (mut own_messages, answers) = socket.split();
    let to_client = outgoing.clone();
    tokio::spawn(async move {
        while let Some(message) = own_messages.next().await {
            if to_client.send((bytes(&message), None)).await.is_err() {
                return;
            }
        }
    });
    let permits = Arc::new(Semaphore::new(REQUESTS_AT_ONCE));
    let mut session = Session { service, answers, outgoing, permits, shut_down: false };
    let ended = session.run(input).await;
    // Where a client does not read, nobody waits for what it would.
    let _ = tokio::time::timeout(LAST_WORDS, async {
        let _ = session.outgoing.send(END).await;
        let _ = writer.await;
    })
    .await;
    ended
}

async fn write_all(mut output: impl AsyncWrite + Unpin, mut messages: mpsc::Receiver<Outgoing>) {
    while let Some((body, permit)) = messages.recv().await {
        if body.is_empty() || write(&mut output, &body).await.is_err() {
            return;
        }
        drop(permit);
    }
}

fn bytes(message: &impl serde::Serialize) -> Vec<u8> {
    // Nothing that is sent has keys other than strings, which is what could fail.
    serde_json::to_vec(message).unwrap_or_default()
}

struct Session<S, A> {
    service: LspService<S>,
    answers: A,
    outgoing: mpsc::Sender<Outgoing>,
    permits: Arc<Semaphore>,
    shut_down: bool,
}

impl<S: LanguageServer, A: futures_util::Sink<Response> + Unpin> Session<S, A> {
    async fn run(&mut self, input: impl AsyncRead + Unpin) -> Ended {
        let mut frames = FrameReader::new(BufReader::new(input));
        loop {
            let message = match frames.next().await {
                Frame::Message(bytes) if bytes.is_empty() => continue,
                Frame::Message(bytes) => serde_json::from_slice(&bytes).map_err(|_| Error::parse_error()),
                Frame::TooLarge(length) => Err(too_large(length)),
                Frame::Garbage => Err(Error::parse_error()),
                Frame::End => return Ended::Abruptly,
            };
            match message {
                Ok(message) => {
                    if let Some(ended) = self.take(message).await {
                        return ended;
                    }
                }
                Err(error) => self.refuse(Id::Null, error).await,
            }
        }
    }

    /// Takes a message; the end of the session, if it is that.
    async fn take(&mut self, mut message: Value) -> Option<Ended> {
        let method = message.get("method").and_then(Value::as_str).map(str::to_owned);
        let Some(method) = method else {
            self.response(message).await;
            return None;
        };
        let is_request = message.get("id").is_some_and(|id| !id.is_null());
        match method.as_str() {
            "exit" if !is_request => {
                return Some(if self.shut_down { Ended::Properly } else { Ended::Abruptly });
            }
            "shutdown" => {
                // Some clients send empty parameters, which the library refuses.
                message.as_object_mut().map(|fields| fields.remove("params"));
            }
            "initialize" => spell_diagnostics(&mut message),
            _ => {}
        }
        let id = id_of(&message);
        match serde_json::from_value::<Request>(message) {
            Ok(request) => self.request(request, is_request, method == "shutdown").await,
            Err(_) => self.refuse(id, Error::invalid_request()).await,
        }
        None
    }

    /// The answer to a request of ours.
    async fn response(&mut self, message: Value) {
        let id = id_of(&message);
        let is_answer = message.get("result").is_some() || message.get("error").is_some();
        match serde_json::from_value::<Response>(message) {
            Ok(response) if is_answer => drop(self.answers.send(response).await),
            // An answer is not answered.
            Err(_) if is_answer => {}
            _ => self.refuse(id, Error::invalid_request()).await,
        }
    }

    async fn request(&mut self, request: Request, is_request: bool, ends: bool) {
        let permit = match is_request {
            true => Arc::clone(&self.permits).acquire_owned().await.ok(),
            false => None,
        };
        if poll_fn(|context| self.service.poll_ready(context)).await.is_err() {
            return;
        }
        let answer = self.service.call(request);
        let mut answer: Answering = Box::pin(async move { answer.await.ok().flatten() });
        let outgoing = self.outgoing.clone();
        match poll_fn(|context| Poll::Ready(answer.as_mut().poll(context))).await {
            Poll::Ready(answer) => {
                self.shut_down |= ends && answer.as_ref().is_some_and(Response::is_ok);
                send(&outgoing, answer, permit).await;
            }
            Poll::Pending => {
                tokio::spawn(async move { send(&outgoing, answer.await, permit).await });
            }
        }
    }

    async fn refuse(&self, id: Id, error: Error) {
        send(&self.outgoing, Some(Response::from_error(id, error)), None).await;
    }
}

async fn send(outgoing: &mpsc::Sender<Outgoing>, answer: Option<Response>, permit: Option<OwnedSemaphorePermit>) {
    if let Some(answer) = answer {
        // Without a writer nobody is there to be answered.
        let _ = outgoing.send((bytes(&answer), permit)).await;
    }
}

/// The protocol says `workspace.diagnostics`; the library, which was written before it was fixed, says `diagnostic`.
fn spell_diagnostics(message: &mut Value) {
    let workspace = message.pointer_mut("/params/capabilities/workspace").and_then(Value::as_object_mut);
    if let Some(workspace) = workspace
        && let Some(diagnostics) = workspace.remove("diagnostics")
    {
        workspace.entry("diagnostic").or_insert(diagnostics);
    }
}

fn id_of(message: &Value) -> Id {
    message.get("id").cloned().and_then(|id| serde_json::from_value(id).ok()).unwrap_or_default()
}

fn too_large(length: u64) -> Error {
    Error {
        code: ErrorCode::InvalidRequest,
        message: format!("a message of {length} bytes; at most {LARGEST_MESSAGE} are taken").into(),
        data: Some(json!({ "largest": LARGEST_MESSAGE })),
    }
}
