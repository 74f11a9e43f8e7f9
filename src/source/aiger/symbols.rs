//! The symbol table: names of inputs. It is optional, and so is the comment after it.

use super::fault::{Fault, Kind};
use super::lines::Lines;

const SYMBOL: &str = "a symbol such as 'i0 name' or 'o0 name', or the line 'c' before a comment";

/// The name of each input, where it has one.
pub(super) fn names(
    lines: &mut Lines<'_>,
    inputs: usize,
    warnings: &mut Vec<Fault>,
) -> Result<Vec<Option<String>>, Fault> {
    let mut names = vec![None; inputs];
    let mut taken = std::collections::BTreeSet::new();
    while let Some(line) = lines.next_line() {
        if line.text == b"c" || line.text.starts_with(b"c ") {
            break;
        }
        let wrong = || line.fault(Kind::Expected(SYMBOL));
        let space = line.text.iter().position(|&byte| byte == b' ').ok_or_else(wrong)?;
        let (key, name) = (&line.text[..space], &line.text[space + 1..]);
        let place = key.get(1..).and_then(|digits| std::str::from_utf8(digits).ok()?.parse::<usize>().ok());
        match (key.first(), place) {
            (Some(b'i'), Some(place)) if place < inputs && names[place].is_none() && !name.is_empty() => {
                let name = printable(name);
                let free = free_name(&name, place, &taken);
                if free != name {
                    warnings.push(line.fault(Kind::NameTaken(free.clone())));
                }
                taken.insert(free.clone());
                names[place] = Some(free);
            }
            (Some(b'o'), Some(0)) if !name.is_empty() => {}
            _ => return Err(wrong()),
        }
    }
    Ok(names)
}

/// The name as text of one line.
fn printable(name: &[u8]) -> String {
    String::from_utf8_lossy(name).chars().map(|c| if c.is_control() { '?' } else { c }).collect()
}

fn free_name(name: &str, place: usize, taken: &std::collections::BTreeSet<String>) -> String {
    let mut free = name.to_owned();
    while taken.contains(&free) {
        free = format!("{free}_{}", place + 1);
    }
    free
}
