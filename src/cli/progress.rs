//! One line of progress on a terminal, for runs that take longer than half a second.

use std::io::{IsTerminal, Write};
use std::sync::{Arc, Condvar, Mutex, MutexGuard, PoisonError};
use std::thread::JoinHandle;
use std::time::Duration;

/// Runs shorter than this show nothing.
const PATIENCE: Duration = Duration::from_millis(500);

#[derive(Default)]
struct State {
    message: String,
    /// The message on the terminal, if one is.
    shown: String,
    /// Half a second has passed.
    late: bool,
    /// Something else is being written.
    paused: bool,
    ended: bool,
}

impl State {
    fn erase(&mut self) {
        if !self.shown.is_empty() {
            let _ = write!(std::io::stderr(), "\r\x1b[K");
            self.shown.clear();
        }
    }

    fn show(&mut self) {
        if self.late && !self.paused && !self.ended && self.shown != self.message {
            self.erase();
            let _ = write!(std::io::stderr(), "{}", self.message);
            let _ = std::io::stderr().flush();
            self.shown.clone_from(&self.message);
        }
    }
}

/// What is being done, shown on standard error where that is a terminal; erased when it ends.
pub struct Progress {
    shared: Arc<(Mutex<State>, Condvar)>,
    watch: Option<JoinHandle<()>>,
}

impl Progress {
    /// Starts to wait for half a second; nothing is ever shown off a terminal.
    pub fn start() -> Self {
        let shared = Arc::new((Mutex::new(State::default()), Condvar::new()));
        let dumb = std::env::var_os("TERM").is_some_and(|term| term == "dumb");
        let watch = (std::io::stderr().is_terminal() && !dumb).then(|| {
            let shared = Arc::clone(&shared);
            std::thread::spawn(move || {
                let (state, ended) = &*shared;
                let state = lock(state);
                let waited = ended.wait_timeout_while(state, PATIENCE, |state| !state.ended);
                let (mut state, _) = waited.unwrap_or_else(PoisonError::into_inner);
                state.late = true;
                state.show();
            })
        });
        Progress { shared, watch }
    }

    /// What is being done from now on: one line.
    pub fn doing(&self, message: &str) {
        let mut state = lock(&self.shared.0);
        state.message = crate::terminal::escape(message).replace('\n', " ").chars().take(79).collect();
        state.show();
    }

    /// Takes the line away, for something else to be written.
    pub fn pause(&self) {
        let mut state = lock(&self.shared.0);
        state.paused = true;
        state.erase();
    }

    /// Shows it again.
    pub fn resume(&self) {
        let mut state = lock(&self.shared.0);
        state.paused = false;
        state.show();
    }
}

impl Drop for Progress {
    fn drop(&mut self) {
        let (state, ended) = &*self.shared;
        {
            let mut state = lock(state);
            state.ended = true;
            state.erase();
        }
        ended.notify_all();
        if let Some(watch) = self.watch.take() {
            let _ = watch.join();
        }
    }
}

fn lock(state: &Mutex<State>) -> MutexGuard<'_, State> {
    state.lock().unwrap_or_else(PoisonError::into_inner)
}
