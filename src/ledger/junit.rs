//! Findings as JUnit XML, one test case a problem: the shape that build servers read (common practice; there is no
//! standard for it).

use std::fmt::Write;

use crate::ledger::{Finding, Ledger};

/// The XML text. Every problem of `now` and every finding about another one is a test case.
pub fn junit(now: &Ledger, findings: &[Finding]) -> String {
    let mut files: Vec<&str> = now.entries.keys().map(String::as_str).collect();
    files.extend(findings.iter().map(|finding| finding.file.as_str()));
    files.sort_unstable();
    files.dedup();
    let failed = |file: &str| findings.iter().any(|finding| finding.file == file);
    let failures = files.iter().filter(|file| failed(file)).count();
    let mut xml = String::from("<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n");
    _ = writeln!(xml, "<testsuite name=\"tallymark ledger\" tests=\"{}\" failures=\"{failures}\">", files.len());
    for file in files {
        let name = escape(file);
        if !failed(file) {
            _ = writeln!(xml, "  <testcase classname=\"ledger\" name=\"{name}\"/>");
            continue;
        }
        _ = writeln!(xml, "  <testcase classname=\"ledger\" name=\"{name}\">");
        for finding in findings.iter().filter(|finding| finding.file == file) {
            let text = format!("{}: kept {}, now {}", finding.what, finding.kept, finding.now);
            _ = writeln!(xml, "    <failure message=\"{}\"/>", escape(&text));
        }
        xml.push_str("  </testcase>\n");
    }
    xml + "</testsuite>\n"
}

fn escape(text: &str) -> String {
    let mut escaped = String::with_capacity(text.len());
    for character in text.chars() {
        match character {
            '&' => escaped.push_str("&amp;"),
            '<' => escaped.push_str("&lt;"),
            '>' => escaped.push_str("&gt;"),
            '"' => escaped.push_str("&quot;"),
            c if c.is_control() => escaped.push(' '),
            c => escaped.push(c),
        }
    }
    escaped
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_are_escaped_and_failures_counted() {
        let finding = Finding { file: "a&b".into(), what: "count".into(), kept: "1".into(), now: "<2>".into() };
        let xml = junit(&Ledger::default(), &[finding]);
        assert!(xml.contains("tests=\"1\" failures=\"1\""));
        assert!(xml.contains("name=\"a&amp;b\"") && xml.contains("now &lt;2&gt;"));
    }
}
