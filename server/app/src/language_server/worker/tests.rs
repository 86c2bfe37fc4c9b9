//! What goes wrong costs one answer, is logged every time, and is shown once.

#![allow(clippy::unwrap_used, clippy::panic)]

use std::sync::mpsc::sync_channel;

use super::*;
use crate::batch;

fn worker() -> (Worker, Receiver<Event>) {
    let (sender, receiver) = sync_channel(10);
    let pool = || batch::pool(Some(1)).unwrap();
    (Worker::new(sender, Arc::default(), pool(), pool()), receiver)
}

/// The notes that wait: how many are logged, and how many shown.
fn said(worker: &Worker) -> (usize, usize) {
    let notes = worker.outbox.take_notes();
    let logged = notes.iter().filter(|note| matches!(note, Note::Log(..))).count();
    (logged, notes.iter().filter(|note| matches!(note, Note::Show(..))).count())
}

#[test]
fn a_panic_while_answering_costs_one_answer() {
    let (mut worker, events) = worker();
    for round in 0..2 {
        worker.ask_all(Box::new(|_| panic!("a bug of ours")));
        let Event::Trouble(cause) = events.recv().unwrap() else { panic!("no trouble") };
        assert!(cause.contains("a bug of ours"), "{cause}");
        worker.take(Event::Trouble(cause));
        assert_eq!(said(&worker), (1, usize::from(round == 0)));
    }
    let (reply, answered) = std::sync::mpsc::channel();
    worker.ask_all(Box::new(move |all| reply.send(all.len()).unwrap()));
    assert_eq!(answered.recv(), Ok(0));
}

#[test]
fn a_text_that_cannot_be_read_answers_nothing_and_is_told_of() {
    let (mut worker, _events) = worker();
    let uri = Url::parse("file:///nowhere/a.tex").unwrap();
    worker.take(Event::Open { uri: uri.clone(), language: "latex".into(), version: 1, text: String::new() });
    let (reply, answered) = std::sync::mpsc::channel();
    let task = move |look: Result<Look, Refusal>| reply.send(look.err()).unwrap();
    worker.take(Event::Ask(Question { uri, places: Vec::new(), freshly: true, task: Box::new(task) }));
    let key = worker.papers.first().unwrap().key.clone();
    let revision = worker.papers.first().unwrap().now();
    worker.take(Event::Read { key, revision, result: Err("internal error: x".into()), memory: Box::default() });
    assert_eq!(answered.recv(), Ok(Some(Refusal::Unknown)));
    assert_eq!(said(&worker), (1, 1));
}

#[test]
fn what_is_late_does_not_count() {
    let (mut worker, _events) = worker();
    let uri = Url::parse("file:///nowhere/a.tex").unwrap();
    worker.take(Event::Open { uri: uri.clone(), language: "latex".into(), version: 1, text: String::new() });
    let paper = worker.papers.first().unwrap();
    let (key, revision) = (paper.key.clone(), paper.now());
    worker.take(Event::Change { uri, version: 2, changes: Vec::new() });
    worker.take(Event::Read { key, revision, result: Err("late".into()), memory: Box::default() });
    assert_eq!(said(&worker), (0, 0));
    assert!(worker.papers.first().unwrap().due.is_some());
}
