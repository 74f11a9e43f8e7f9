//! Results as files and text: nothing is computed here.

pub mod alone;
pub mod dossier;
pub mod explain;
pub mod files;
pub mod front;
pub mod header;
pub mod json;
pub mod objective;
pub mod places;
pub mod plan;
pub mod readable;
pub mod self_test;
pub mod shots;
pub mod simulation;
pub mod start;
pub mod story;
pub mod summary;
pub mod values;
pub mod ways;
