//! The ledger: the file in which a project keeps the expected tallies and costs of its problems, so that a change shows.
//!
//! Plain data with a JSON form, sorted by file; this room computes no tally and no cost. [`compare()`] holds a new reading
//! of a folder against the kept one; [`junit`] writes the result for a build server.

pub mod compare;
pub mod junit;

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};
use thiserror::Error;

pub use compare::{Finding, compare};

/// The name of the file, in the folder it is about.
pub const FILE_NAME: &str = "ledger.json";
/// The version of its shape.
const SCHEMA: u32 = 1;

/// What is kept of a problem.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Entry {
    /// The digest of the problem file.
    pub sha256: String,
    /// The version of the program that did the work.
    pub version: String,
    /// The start state that was wanted.
    #[serde(default = "all_strings", skip_serializing_if = "is_all_strings")]
    pub start: String,
    /// The tally, null where it is not known exactly.
    pub count: Option<String>,
    /// The marked states, null where they are not known exactly.
    pub marked: Option<String>,
    /// The size of the start state.
    pub space: String,
    /// The verdict on the oracle: `equal`, or why there is none.
    pub verdict: String,
    /// What the oracle costs, by level.
    pub costs: BTreeMap<String, Cost>,
}

/// The start of entries that name none.
fn all_strings() -> String {
    "strings".to_owned()
}

fn is_all_strings(start: &str) -> bool {
    start == "strings"
}

/// What an oracle costs at a level.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize, Deserialize)]
pub struct Cost {
    /// Qubits.
    pub qubits: u64,
    /// Two-input ANDs.
    pub and_count: u64,
    /// T gates; 0 at the levels that have none.
    pub t_count: u64,
    /// Layers.
    pub depth: u64,
    /// Gates.
    pub gates: u64,
}

/// The entries of a folder by file name.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Ledger {
    /// By file name, relative to the folder.
    pub entries: BTreeMap<String, Entry>,
}

#[derive(Serialize, Deserialize)]
struct LedgerFile {
    schema: u32,
    problems: BTreeMap<String, Entry>,
}

/// A ledger that cannot be read.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum LedgerError {
    /// Not JSON of this shape.
    #[error("not a ledger: {0}")]
    Syntax(String),
    /// Written by a later version.
    #[error("the ledger has the shape {0}, this program knows {SCHEMA}")]
    Schema(u32),
}

impl Ledger {
    /// The JSON text.
    pub fn to_json(&self) -> serde_json::Value {
        let file = LedgerFile { schema: SCHEMA, problems: self.entries.clone() };
        serde_json::to_value(file).expect("plain data")
    }

    /// Reads what [`Ledger::to_json`] gives.
    pub fn from_json(text: &str) -> Result<Self, LedgerError> {
        let file: LedgerFile = serde_json::from_str(text).map_err(|error| LedgerError::Syntax(error.to_string()))?;
        if file.schema != SCHEMA {
            return Err(LedgerError::Schema(file.schema));
        }
        Ok(Self { entries: file.problems })
    }
}
