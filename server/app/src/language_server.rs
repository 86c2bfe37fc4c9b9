//! The language server: what `check` knows, while the author types.
//!
//! `transport.rs` reads and writes messages, `service.rs` hands each to the worker before anything is awaited,
//! `worker.rs` owns all state, `reading.rs` makes immutable pictures of papers off its thread, and every feature has a
//! file that turns the answer of one function of the checker into the protocol's shape. The one idea: texts change at
//! once and in order; everything else looks at a picture and is thrown away if the texts have moved on.

mod actions;
mod capabilities;
mod carrying;
mod commands;
mod configurations;
mod convert;
mod disk;
mod documents;
mod event;
mod framing;
mod grouping;
mod looking;
mod outbox;
mod papers;
mod parent;
mod places;
mod publishing;
mod pulling;
mod reading;
mod service;
mod settings;
mod structure;
mod tokens;
mod transport;
mod worker;
mod writing;

use std::sync::Arc;
use std::sync::mpsc::sync_channel;

use serde_json::json;
use tower_lsp::LspService;
use tower_lsp::lsp_types::Registration;

use crate::batch;
use crate::files::Failure;
use crate::output::cause;
use capabilities::Client;
use event::Event;
use outbox::Outbox;
use service::Service;
use transport::Ended;
use worker::Worker;

/// So many events wait for the worker; it takes them faster than they come.
const WAITING_EVENTS: usize = 1024;

/// At least so many threads answer questions, so that a paper that is being read does not hold them up.
const FEWEST_READERS: usize = 2;

/// Stack of the worker, in bytes: it scans texts, as the readers do.
const STACK: usize = 16 << 20;

/// Serves on standard input and output with so many threads for messages. Whether the session was ended properly.
pub fn run(threads: usize) -> Result<bool, Failure> {
    let trouble = |error: std::io::Error| Failure::new("serve", cause(&error));
    let runtime = tokio::runtime::Builder::new_multi_thread().worker_threads(threads).enable_all().build();
    let runtime = runtime.map_err(trouble)?;
    let readers = std::thread::available_parallelism().map_or(FEWEST_READERS, |count| count.get().max(FEWEST_READERS));
    let pools = (batch::pool(u16::try_from(readers).ok())?, batch::pool(Some(1))?);
    let (events, received) = sync_channel(WAITING_EVENTS);
    let outbox = Arc::new(Outbox::default());
    let worker = Worker::new(events.clone(), outbox.clone(), pools.0, pools.1);
    let thread = std::thread::Builder::new().name("worker".into()).stack_size(STACK);
    thread.spawn(move || worker.run(&received)).map_err(trouble)?;
    let ended = runtime.block_on(serve(events, outbox));
    // A thread that reads standard input may wait for ever.
    runtime.shutdown_background();
    Ok(ended == Ended::Properly)
}

async fn serve(events: std::sync::mpsc::SyncSender<Event>, outbox: Arc<Outbox>) -> Ended {
    let (parent, mut named) = tokio::sync::mpsc::unbounded_channel();
    let (service, socket) = LspService::build(|wire| {
        let answers = events.clone();
        let settings = move |section| drop(answers.send(Event::SettingsAnswered(section)));
        tokio::spawn(outbox.deliver(wire, settings));
        Service::new(events.clone(), move |id| {
            // Whoever watches is gone when the session is over.
            let _ = parent.send(id);
        })
    })
    .custom_method("indexwise/ledger", Service::ledger)
    .finish();
    let session = transport::serve(tokio::io::stdin(), tokio::io::stdout(), service, socket);
    let orphaned = async {
        match named.recv().await {
            Some(id) => parent::gone(id).await,
            None => std::future::pending().await,
        }
    };
    let ended = tokio::select! {
        ended = session => ended,
        () = orphaned => Ended::Abruptly,
    };
    let _ = events.try_send(Event::Shutdown);
    ended
}

/// What the client is asked to watch and to tell of.
fn registrations(client: &Client) -> Vec<Registration> {
    let mut registrations = Vec::new();
    if client.watches {
        let globs = ["**/*.{tex,ltx,sty,md,qmd,Rmd,rmd,inote}", "**/indexwise.toml", "**/*.txt"];
        let watchers: Vec<_> = globs.iter().map(|glob| json!({ "globPattern": glob })).collect();
        registrations.push(Registration {
            id: "indexwise-files".to_owned(),
            method: "workspace/didChangeWatchedFiles".to_owned(),
            register_options: Some(json!({ "watchers": watchers })),
        });
    }
    if client.registers_settings {
        registrations.push(Registration {
            id: "indexwise-settings".to_owned(),
            method: "workspace/didChangeConfiguration".to_owned(),
            register_options: Some(json!({ "section": settings::SECTION })),
        });
    }
    registrations
}
