//! The person's interruption (Ctrl-C): the first asks for a clean end, the second ends the program at once.

use super::exit;
use signal_hook::consts::SIGINT;
use signal_hook::flag;
use std::ops::ControlFlow;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// Whether the person has asked for an end.
pub struct Interrupt(Arc<AtomicBool>);

impl Interrupt {
    /// Listens from now on. Where the system does not let it, an interruption ends the program as ever.
    pub fn listen() -> Self {
        let asked = Arc::new(AtomicBool::new(false));
        // In this order: at the first signal nothing has been asked yet.
        let code = i32::from(exit::INTERRUPTED);
        let second = flag::register_conditional_shutdown(SIGINT, code, Arc::clone(&asked));
        if second.is_ok() {
            let _ = flag::register(SIGINT, Arc::clone(&asked));
        }
        Interrupt(asked)
    }

    /// What to tell who asks whether to go on.
    pub fn flow(&self) -> ControlFlow<()> {
        if self.0.load(Ordering::Relaxed) {
            ControlFlow::Break(())
        } else {
            ControlFlow::Continue(())
        }
    }
}
