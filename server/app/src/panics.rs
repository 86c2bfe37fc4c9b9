//! A panic is a bug of ours; it becomes one line, and the other papers go on.
//!
//! The standard hook prints a message at once, from whatever thread; ours only remembers it for the one who
//! catches the panic. A stack overflow is no panic: nesting is capped in the grammar, and the workers have
//! large stacks (`batch.rs`).

use std::any::Any;
use std::cell::RefCell;
use std::panic::{AssertUnwindSafe, catch_unwind, set_hook};

thread_local! {
    static LAST: RefCell<Option<String>> = const { RefCell::new(None) };
}

/// Silences the standard message and remembers message and place instead.
pub fn keep_quiet() {
    set_hook(Box::new(|panic| {
        let place = panic.location().map(|at| format!(" ({}:{})", at.file(), at.line())).unwrap_or_default();
        let told = format!("{}{place}", words(panic.payload()));
        LAST.with(|last| *last.borrow_mut() = Some(told));
    }));
}

/// Runs a piece of work; what it panics with, if it does, in one line.
///
/// The work is given up as a whole, so nothing half-done of it is seen afterwards.
pub fn caught<T>(work: impl FnOnce() -> T) -> Result<T, String> {
    catch_unwind(AssertUnwindSafe(work)).map_err(|payload| {
        let told = LAST.with(|last| last.borrow_mut().take());
        told.unwrap_or_else(|| words(payload.as_ref())).replace('\n', " ")
    })
}

fn words(payload: &(dyn Any + Send)) -> String {
    if let Some(text) = payload.downcast_ref::<&str>() {
        return (*text).to_owned();
    }
    payload.downcast_ref::<String>().cloned().unwrap_or_else(|| "no message".to_owned())
}

#[cfg(test)]
mod tests {
    #![allow(clippy::panic)]
    use super::*;

    #[test]
    fn a_panic_becomes_a_line_and_work_goes_on() {
        assert_eq!(caught(|| 3), Ok(3));
        let told = caught(|| panic!("two\nlines"));
        assert!(told.is_err_and(|line| line.contains("two lines")));
        assert_eq!(caught(|| 4), Ok(4));
    }
}
