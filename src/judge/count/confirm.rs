//! A second listing by varisat under a deadline.
//!
//! varisat cannot be stopped inside a call, so it runs on a thread of its own. When the budget runs out first, the
//! thread is left behind: it ends with its call, because it asks the budget before the next one.

use std::sync::mpsc::{self, RecvTimeoutError};
use std::time::Duration;

use super::list::{self, Listing, Plan, WrongModel};
use super::parts::Part;
use crate::budget::Budget;
use crate::sat::Varisat;

/// Time between two looks at the budget.
const LOOK: Duration = Duration::from_millis(20);

/// The listings of these parts; `None` where the budget ran out.
pub(super) fn beside(parts: Vec<Part>, plan: Plan, budget: &Budget) -> Option<Result<Vec<Listing>, WrongModel>> {
    let (sender, receiver) = mpsc::channel();
    let its_budget = budget.clone();
    let work = move || {
        // The receiver may be gone by then.
        let _ = sender.send(list::list_all::<Varisat>(&parts, plan, &its_budget));
    };
    std::thread::Builder::new().name("confirming".to_owned()).spawn(work).ok()?;
    loop {
        match receiver.recv_timeout(LOOK) {
            Ok(listings) => return Some(listings),
            Err(RecvTimeoutError::Timeout) if !budget.spent() => {}
            Err(_) => return None,
        }
    }
}
