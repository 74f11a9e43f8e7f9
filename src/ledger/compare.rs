//! A new reading of a folder against the kept one.

use crate::ledger::{Cost, Entry, Ledger};

/// Something that the ledger does not allow.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Finding {
    /// The problem file.
    pub file: String,
    /// What it is about: `count`, `verdict`, `qubits at toffoli`.
    pub what: String,
    /// What the ledger keeps.
    pub kept: String,
    /// What was found now.
    pub now: String,
}

/// Everything in `now` that `kept` does not allow: a problem that is new or gone, a tally that changed, a verdict that is
/// not "equal" any more, a cost that grew by more than `percent`. Costs that fell are no finding.
pub fn compare(kept: &Ledger, now: &Ledger, percent: u64) -> Vec<Finding> {
    let mut findings = Vec::new();
    for (file, entry) in &now.entries {
        match kept.entries.get(file) {
            Some(old) => compare_entry(file, old, entry, percent, &mut findings),
            None => findings.push(finding(file, "problem", "not in the ledger", "there")),
        }
    }
    for file in kept.entries.keys().filter(|file| !now.entries.contains_key(*file)) {
        findings.push(finding(file, "problem", "in the ledger", "gone"));
    }
    findings.sort_by(|a, b| (&a.file, &a.what).cmp(&(&b.file, &b.what)));
    findings
}

fn compare_entry(file: &str, kept: &Entry, now: &Entry, percent: u64, findings: &mut Vec<Finding>) {
    let unknown = || "unknown".to_owned();
    let numbers = [
        ("count", kept.count.clone().unwrap_or_else(unknown), now.count.clone().unwrap_or_else(unknown)),
        ("marked", kept.marked.clone().unwrap_or_else(unknown), now.marked.clone().unwrap_or_else(unknown)),
        ("start", kept.start.clone(), now.start.clone()),
        ("space", kept.space.clone(), now.space.clone()),
        ("verdict", kept.verdict.clone(), now.verdict.clone()),
    ];
    for (what, kept, now) in numbers {
        if kept != now {
            findings.push(finding(file, what, &kept, &now));
        }
    }
    if now.verdict == "differs" || now.verdict == "undecided" {
        findings.push(finding(file, "audit", "equal", &now.verdict));
    }
    for (level, cost) in &now.costs {
        match kept.costs.get(level) {
            Some(old) => compare_costs(file, level, *old, *cost, percent, findings),
            None => findings.push(finding(file, &format!("costs at {level}"), "not in the ledger", "there")),
        }
    }
}

fn compare_costs(file: &str, level: &str, kept: Cost, now: Cost, percent: u64, findings: &mut Vec<Finding>) {
    let figures = [
        ("qubits", kept.qubits, now.qubits),
        ("ANDs", kept.and_count, now.and_count),
        ("T", kept.t_count, now.t_count),
        ("depth", kept.depth, now.depth),
        ("gates", kept.gates, now.gates),
    ];
    for (what, kept, now) in figures {
        if u128::from(now) * 100 > u128::from(kept) * u128::from(100 + percent) {
            findings.push(finding(file, &format!("{what} at {level}"), &kept.to_string(), &now.to_string()));
        }
    }
}

fn finding(file: &str, what: &str, kept: &str, now: &str) -> Finding {
    Finding { file: file.to_owned(), what: what.to_owned(), kept: kept.to_owned(), now: now.to_owned() }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn entry(count: &str, verdict: &str, qubits: u64) -> Entry {
        let cost = Cost { qubits, and_count: 10, t_count: 0, depth: 100, gates: 200 };
        Entry {
            sha256: "0".repeat(64),
            version: "0".to_owned(),
            start: "strings".to_owned(),
            count: Some(count.to_owned()),
            marked: Some(count.to_owned()),
            space: "8".to_owned(),
            verdict: verdict.to_owned(),
            costs: [("toffoli".to_owned(), cost)].into(),
        }
    }

    fn ledger(entries: &[(&str, Entry)]) -> Ledger {
        Ledger { entries: entries.iter().map(|(name, entry)| ((*name).to_owned(), entry.clone())).collect() }
    }

    #[test]
    fn what_changed_for_the_worse_is_found_and_what_did_not_is_not() {
        let kept =
            ledger(&[("a", entry("3", "equal", 100)), ("b", entry("1", "equal", 10)), ("c", entry("1", "equal", 10))]);
        assert_eq!(compare(&kept, &kept, 0), []);
        let now = ledger(&[
            ("a", entry("4", "equal", 110)),
            ("b", entry("1", "undecided", 9)),
            ("d", entry("1", "equal", 1)),
        ]);
        let found = |percent| {
            let lines = compare(&kept, &now, percent);
            lines.into_iter().map(|f| format!("{} {}: {} -> {}", f.file, f.what, f.kept, f.now)).collect::<Vec<_>>()
        };
        let expected = [
            "a count: 3 -> 4",
            "a marked: 3 -> 4",
            "a qubits at toffoli: 100 -> 110",
            "b audit: equal -> undecided",
            "b verdict: equal -> undecided",
            "c problem: in the ledger -> gone",
            "d problem: not in the ledger -> there",
        ];
        assert_eq!(found(9), expected);
        assert!(!found(10).contains(&"a qubits at toffoli: 100 -> 110".to_owned()));
    }

    #[test]
    fn a_ledger_reads_back() {
        let ledger = ledger(&[("a", entry("3", "equal", 100))]);
        assert_eq!(Ledger::from_json(&ledger.to_json().to_string()), Ok(ledger));
        assert!(Ledger::from_json("{\"schema\": 2, \"problems\": {}}").is_err());
        assert!(Ledger::from_json("[]").is_err());
    }
}
