//! What the system does for a run: limits on a process, its end with its parent, signals. The only unsafe code of the
//! command line stands here. Memory is limited under Linux; signals are those of a Unix.

/// Whether this system can limit the memory of a process.
pub const LIMITS_MEMORY: bool = cfg!(target_os = "linux");

/// From now on this process has at most so many bytes of address space: what asks for more is refused, and ends, without an
/// image of its memory on the disk. A program that it starts may lift the limit for itself.
#[cfg(target_os = "linux")]
pub fn limit_memory(bytes: u64) {
    for (resource, most) in [(libc::RLIMIT_AS, bytes), (libc::RLIMIT_CORE, 0)] {
        let mut limit = libc::rlimit { rlim_cur: 0, rlim_max: 0 };
        // SAFETY: getrlimit writes the limit and setrlimit only reads it; it lives until both return.
        unsafe {
            if libc::getrlimit(resource, &raw mut limit) == 0 {
                limit.rlim_cur = most.min(limit.rlim_max);
                libc::setrlimit(resource, &raw const limit);
            }
        }
    }
}

/// There is no such limit here.
#[cfg(not(target_os = "linux"))]
pub fn limit_memory(_bytes: u64) {}

/// From now on this process ends with its parent, whose number it was given: at once where that has gone already.
#[cfg(target_os = "linux")]
pub fn end_with_parent(parent: u32) {
    // SAFETY: prctl with these arguments takes no pointers.
    unsafe { libc::prctl(libc::PR_SET_PDEATHSIG, libc::SIGKILL) };
    // A parent that went before has left this process to another, and no signal will come.
    if std::os::unix::process::parent_id() != parent {
        std::process::exit(1);
    }
}

/// From now on this process ends with its parent, which holds the other end of its standard input until it goes.
#[cfg(not(target_os = "linux"))]
pub fn end_with_parent(_parent: u32) {
    std::thread::spawn(|| {
        let _ = std::io::copy(&mut std::io::stdin(), &mut std::io::sink());
        std::process::exit(1);
    });
}

/// The signals that ask a run to stop.
#[cfg(unix)]
mod signals {
    use std::sync::atomic::{AtomicI32, Ordering};

    /// The signal that came; 0 before one does.
    static CAME: AtomicI32 = AtomicI32::new(0);

    extern "C" fn note(signal: libc::c_int) {
        CAME.store(signal, Ordering::Relaxed);
    }

    /// Notes the signals that ask to stop instead of ending at once; those that the caller ignores stay ignored.
    pub fn note_signals() {
        for signal in [libc::SIGINT, libc::SIGTERM, libc::SIGHUP] {
            // SAFETY: an all-zero sigaction is valid. The handler does nothing but store into an atomic, which a
            // handler may do; both structures live until the calls return.
            unsafe {
                let mut before: libc::sigaction = std::mem::zeroed();
                let mut action: libc::sigaction = std::mem::zeroed();
                action.sa_sigaction = note as extern "C" fn(libc::c_int) as usize;
                action.sa_flags = libc::SA_RESTART;
                libc::sigaction(signal, std::ptr::null(), &raw mut before);
                if before.sa_sigaction != libc::SIG_IGN {
                    libc::sigaction(signal, &raw const action, std::ptr::null_mut());
                }
            }
        }
    }

    /// The signal that came.
    pub fn stopped() -> Option<i32> {
        Some(CAME.load(Ordering::Relaxed)).filter(|signal| *signal != 0)
    }

    /// Ends this process by a signal, so that whoever started it sees what ended it.
    pub fn end_by(signal: i32) -> ! {
        // SAFETY: neither call takes a pointer.
        unsafe {
            libc::signal(signal, libc::SIG_DFL);
            libc::raise(signal);
        }
        std::process::exit(128 + signal)
    }
}

#[cfg(unix)]
pub use signals::{end_by, note_signals, stopped};

/// A run is ended by the system here.
#[cfg(not(unix))]
pub fn note_signals() {}

/// No signal comes here.
#[cfg(not(unix))]
pub fn stopped() -> Option<i32> {
    None
}

/// No signal comes here.
#[cfg(not(unix))]
pub fn end_by(signal: i32) -> ! {
    std::process::exit(128 + signal)
}
