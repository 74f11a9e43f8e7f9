//! Narrowing as its user meets it.

use serde_json::Value;

use super::families::{self, Counting};
use crate::suite::command::Desk;
use tallymark::source::dimacs;

/// Two inputs and their conjunction, exclusive or and majority with a third: three bits searched of six.
const GATES: &str = "p cnf 6 15\n-4 1 0\n-4 2 0\n4 -1 -2 0\n\
    -5 1 2 0\n-5 -1 -2 0\n5 -1 2 0\n5 1 -2 0\n\
    -6 1 2 0\n-6 1 3 0\n-6 2 3 0\n6 -1 -2 0\n6 -1 -3 0\n6 -2 -3 0\n\
    5 6 0\n-4 -6 3 0\n";

fn desk_with(name: &str, text: &str) -> Desk {
    let desk = Desk::new();
    desk.file(name, text);
    desk
}

fn of<'a>(object: &'a Value, path: &str) -> &'a Value {
    object.pointer(path).unwrap_or_else(|| panic!("{path} in {object}"))
}

#[test]
fn a_dossier_searches_inputs_and_says_what_it_computes() {
    let desk = desk_with("gates.cnf", GATES);
    let (exit, object) = desk.json(&["dossier", "gates.cnf", "-o", "d"]);
    assert_eq!(exit, 0, "{object}");
    assert_eq!((of(&object, "/narrowing/bits_before"), of(&object, "/narrowing/bits_after")), (&6.into(), &3.into()));
    assert_eq!(of(&object, "/narrowing/computed").as_array().map(Vec::len), Some(3));
    assert_eq!((of(&object, "/tally/space"), of(&object, "/audit/verdict")), (&"8".into(), &"equal".into()));
    let (exit, whole) = desk.json(&["dossier", "gates.cnf", "-o", "w", "--no-narrowing"]);
    assert_eq!(exit, 0);
    assert_eq!((of(&whole, "/narrowing/bits_after"), of(&whole, "/tally/space")), (&6.into(), &"64".into()));
    assert_eq!(of(&whole, "/tally/marked"), of(&object, "/tally/marked"), "narrowing one for one leaves M as it is");
    // The folder is judged by what it holds.
    assert_eq!(desk.exit(&["audit", "gates.cnf", "d/oracle.qasm"]), 0);
    assert_eq!(desk.exit(&["audit", "gates.cnf", "d/search.qasm"]), 0);
    assert_eq!(desk.exit(&["audit", "gates.cnf", "d/oracle.qasm", "--self-test", "40"]), 0);
}

#[test]
fn a_wrong_formula_or_claim_in_a_places_file_is_found() {
    let desk = desk_with("gates.cnf", GATES);
    assert_eq!(desk.exit(&["compile", "gates.cnf", "-o", "g.qasm"]), 0);
    assert_eq!(desk.exit(&["audit", "gates.cnf", "g.qasm"]), 0);
    let text = std::fs::read_to_string(desk.path("g.places.json")).unwrap();
    let mut places: Value = serde_json::from_str(&text).unwrap();
    places["computed"][0]["formula"] = serde_json::json!({ "constant": true });
    desk.file("g.places.json", &places.to_string());
    let (exit, object) = desk.json(&["audit", "gates.cnf", "g.qasm"]);
    assert_eq!((exit, of(&object, "/audit/verdict")), (1, &"differs".into()));
    assert_eq!(of(&object, "/audit/witness/bits").as_str().map(str::len), Some(6), "over all bits of the problem");
    desk.file("g.places.json", &text);
    // A clause fewer: bit 4 may be 0 where both inputs are 1, and is no longer the only one.
    desk.file("loose.cnf", &GATES.replace("15", "14").replace("4 -1 -2 0\n", ""));
    assert_eq!(desk.exit(&["audit", "loose.cnf", "g.qasm"]), 1);
    // A clause more: the circuit does not check it.
    desk.file("more.cnf", &GATES.replace("15", "16").replace("5 6 0", "5 6 0\n-1 -3 0"));
    assert_eq!(desk.exit(&["audit", "more.cnf", "g.qasm"]), 1);
}

#[test]
fn hidden_bits_are_computed_and_shots_are_decoded_to_all_bits() {
    let problem = families::sat_with_count(5, 1.0, 2, Counting::Sequential, 2).finish_shown();
    let mut text = String::new();
    dimacs::write(&problem, &mut text).unwrap();
    let desk = desk_with("count.cnf", &text);
    let (exit, object) = desk.json(&["dossier", "count.cnf", "-o", "d"]);
    assert_eq!((exit, of(&object, "/narrowing/bits_after")), (0, &5.into()), "{object}");
    assert_eq!(of(&object, "/tally/marked"), of(&object, "/tally/count"), "only shown bits are searched");
    let codes: Vec<&Value> = object["advice"].as_array().unwrap().iter().map(|advice| &advice["code"]).collect();
    assert!(!codes.contains(&&"hidden-bits-searched".into()), "{codes:?}");
    let (_, listed) = desk.json(&["count", "count.cnf", "--list", "1"]);
    let solution = of(&listed, "/solutions/0/bits").as_str().unwrap();
    // Strings have bit 0 last, and so have measured ones.
    let measured = &solution[solution.len() - 5..];
    desk.file("shots.txt", &format!("{measured}\n"));
    let (_, shots) = desk.json(&["shots", "count.cnf", "shots.txt", "--places", "d/places.json", "--iterations", "0"]);
    assert_eq!(of(&shots, "/shots/hits").as_u64(), Some(1), "{shots}");
}

#[test]
fn any_lets_a_state_stand_for_several_solutions_and_says_so() {
    let problem = families::random_3sat(10, 30, 3);
    let mut text = String::new();
    dimacs::write(&problem, &mut text).unwrap();
    let desk = desk_with("r.cnf", &text);
    let (exit, object) = desk.json(&["dossier", "r.cnf", "--any", "-o", "d"]);
    assert_eq!((exit, of(&object, "/audit/verdict")), (0, &"equal".into()), "{object}");
    assert!(of(&object, "/narrowing/bits_after").as_u64() < Some(8), "{object}");
    assert_eq!(of(&object, "/narrowing/claim"), "one-for-many");
    let number = |path: &str| of(&object, path).as_str().unwrap().parse::<u64>().unwrap();
    assert!(number("/tally/marked") <= number("/tally/count"));
    let (_, explained) = desk.json(&["explain", "r.cnf", "--any"]);
    assert_eq!(of(&explained, "/narrowing"), of(&object, "/narrowing"), "every command decides alike");
    assert!(desk.text(&["explain", "r.cnf", "--any"]).contains("computed bit"));
    assert_eq!(desk.exit(&["count", "r.cnf", "--any", "--no-narrowing"]), 2);
}

/// Where one solution may stand for many, computing everything leaves nothing to search; what each solution determines is
/// computed then.
#[test]
fn any_searches_no_more_than_one_for_one() {
    let text = "p cnf 4 5\n-3 1 0\n-3 2 0\n3 -1 -2 0\n3 4 0\n1 2 0\n";
    let desk = desk_with("small.cnf", text);
    let bits = |arguments: &[&str]| {
        let (exit, object) = desk.json(arguments);
        assert_eq!(exit, 0, "{object}");
        of(&object, "/narrowing/bits_after").as_u64().unwrap()
    };
    let one = bits(&["explain", "small.cnf"]);
    let any = bits(&["explain", "small.cnf", "--any"]);
    assert!(any > 0 && any <= one && one < 4, "{any} with --any, {one} without");
}
