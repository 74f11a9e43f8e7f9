//! `plan` and `shots` on the command line: every aim, numbers alone, noise, shallow machines, and results read back.

use serde_json::Value;

use super::command::Desk;

fn plan(arguments: &[&str]) -> Value {
    let (exit, object) = Desk::new().json(&[&["plan"], arguments].concat());
    assert_eq!(exit, 0, "{arguments:?} {object:#}");
    assert_eq!((&object["problem"], &object["partial"]), (&Value::Null, &false.into()));
    for member in ["aim", "iterations", "success", "success_low", "success_high", "advice"] {
        assert!(!object["plan"][member].is_null(), "{member} of {object:#}");
    }
    object["plan"].clone()
}

#[track_caller]
fn near(found: &Value, wanted: f64) {
    let number = found.as_f64().or_else(|| found.as_str().and_then(|text| text.parse().ok()));
    let number = number.unwrap_or_else(|| panic!("{found} is no number"));
    assert!((number / wanted - 1.0).abs() < 1e-12, "{found} not {wanted}");
}

/// Boyer, Brassard, Hoyer, Tapp 1998, section 3: the formulas; values computed from them outside this program.
#[test]
fn plain_aims_from_numbers_alone() {
    let first = plan(&["--space", "1024", "--count", "1"]);
    assert_eq!((&first["aim"], &first["iterations"]), (&"highest-success".into(), &"25".into()));
    near(&first["success"], 0.999461244744408);
    let eight = plan(&["--space", "8", "--count", "1", "--aim", "highest-within-bound", "--within", "6"]);
    assert_eq!((&eight["iterations"], &eight["success_exact"]), (&"6".into(), &"32761/32768".into()));
    let early = plan(&["--space", "2^20", "--count", "1", "--aim", "least-work", "--try-cost", "0"]);
    assert_eq!(early["iterations"], "596");
    near(&early["expected_oracle_calls"], 705.993439914548);
    // With one check a try, 16 states take 2 iterations instead of 1.
    assert_eq!(plan(&["--space", "16", "--count", "1", "--aim", "least-work"])["iterations"], "2");
    let free = plan(&["--space", "16", "--count", "1", "--aim", "least-work", "--try-cost", "0"]);
    assert_eq!(free["iterations"], "1");
}

/// Brassard, Hoyer, Mosca, Tapp 2002, section 2.1, and Long 2001: computed from the formulas, checked by simulation.
#[test]
fn certainty_has_its_phases() {
    let three = plan(&["--space", "1024", "--count", "3", "--aim", "certainty"]);
    assert_eq!((&three["iterations"], &three["success"]), (&"15".into(), &1.0.into()));
    near(&three["rotation_sine"], 0.935753960424371);
    near(&plan(&["--space", "8", "--count", "1", "--aim", "certainty"])["phase"], 2.12688004715550);
    let none = plan(&["--space", "8", "--count", "0", "--aim", "certainty"]);
    assert_eq!((&none["success"], &none["advice"][0]["code"]), (&0.0.into(), &"no-solution".into()));
}

/// Yoder, Low, Chuang 2014: the phases for L = 5, and the least L = 59 for one in 1024, both at a failure of 0.1.
#[test]
fn a_lower_bound_gets_a_sequence_of_phases() {
    let least = plan(&["--space", "1024", "--low", "1", "--failure", "0.1"]);
    assert_eq!((&least["aim"], &least["iterations"]), (&"at-least-so-many".into(), &"29".into()));
    near(&least["success_low"], 0.9);
    let eighth = plan(&["--space", "8", "--low", "1", "--failure", "0.1"]);
    assert_eq!(eighth["iterations"], "2");
    near(&eighth["phases"][0][0], 1.50090929625804);
    near(&eighth["phases"][1][1], -1.50090929625804);
}

/// Boyer, Brassard, Hoyer, Tapp 1998, section 4: the schedule; its exact expectation computed outside this program.
#[test]
fn nothing_known_gets_the_random_schedule() {
    let unknown = plan(&["--space", "1024"]);
    assert_eq!((&unknown["aim"], &unknown["expected_oracle_calls"]), (&"nothing-known".into(), &Value::Null));
    let widths = "1,2,2,2,3,3,3,4,5,6,7,8,9,11,13,16,19,23,27,32,32";
    let found: Vec<&str> = unknown["widths"].as_array().unwrap().iter().map(|width| width.as_str().unwrap()).collect();
    assert_eq!(found, widths.split(',').collect::<Vec<_>>());
    assert_eq!(unknown["advice"][0]["code"], "stopping-shows-nothing");
    assert!(!unknown.to_string().contains("unsat"));
    let known = plan(&["--space", "1024", "--count", "1", "--aim", "nothing-known"]);
    near(&known["expected_oracle_calls"], 37.0912215965617);
}

#[test]
fn an_interval_gets_the_best_worst_case() {
    let found = plan(&["--space", "1024", "--low", "10", "--high", "40"]);
    assert_eq!(found["aim"], "best-worst-case");
    let worst = found["worst"].as_f64().unwrap();
    assert_eq!(&found["success_low"], &found["worst"]);
    // No number of iterations does better at both ends: sin^2((2k + 1) theta), tried here one by one.
    let success = |k: u32, marked: f64| (f64::from(2 * k + 1) * (marked / 1024.0).sqrt().asin()).sin().powi(2);
    let best = (0..8).map(|k| success(k, 10.0).min(success(k, 40.0))).fold(0.0, f64::max);
    assert!((worst - best).abs() < 1e-12, "{worst} and {best}");
    let open = plan(&["--space", "1024", "--high", "40"]);
    assert_eq!(open["advice"][0]["code"], "if-there-is-any");
}

/// The bound of Brassard, Hoyer, Mosca, Tapp 2002, Theorem 12, holds for the points given and not for half as many.
#[test]
fn counting_on_the_machine() {
    let found = plan(&["--space", "1024", "--aim", "count-on-machine", "--precision", "0.01", "--failure", "0.19"]);
    let points: f64 = found["points"].as_str().unwrap().parse().unwrap();
    let bound = |m: f64| std::f64::consts::PI / m + (std::f64::consts::PI / m).powi(2);
    assert!(bound(points) <= 0.01 && bound(points / 2.0) > 0.01, "{points}");
    // One run is within the bound with probability 8/pi^2 = 0.81, so that is enough here.
    assert_eq!(found["iterations"].as_str().unwrap().parse(), Ok(points - 1.0));
}

/// The table of noise: the closed form p_k = (1-q)^k sin^2((2k+1) theta) + (1-(1-q)^k) M/N, evaluated outside.
#[test]
fn noise_lowers_the_best_count() {
    for (error, k, success) in [("0.01", 23, 0.785618638058332), ("0.05", 18, 0.333419029859045)] {
        let noise = &plan(&["--space", "1024", "--count", "1", "--error", error])["noise"];
        assert_eq!(noise["highest_success"]["iterations"], k);
        near(&noise["highest_success"]["success"], success);
    }
    let plan = plan(&["--space", "1024", "--count", "1", "--error", "0.05", "--try-cost", "0"]);
    assert_eq!(plan["noise"]["least_work"]["iterations"], 11);
    near(&plan["noise"]["least_work"]["work"], 44.5182276117230);
    // 1 - (1 - 0.3334)^12 is the first above 0.99.
    assert_eq!(plan["noise"]["runs"], "12");
}

#[test]
fn noise_that_eats_the_gain_is_said_to() {
    let codes = |error: &str| {
        let plan = plan(&["--space", "1024", "--count", "1", "--error", error]);
        let codes = plan["advice"].as_array().unwrap().iter().map(|a| a["code"].as_str().unwrap().to_owned());
        (codes.collect::<Vec<_>>(), plan["noise"]["break_even"].as_f64().unwrap())
    };
    let (few, break_even) = codes("1e-4");
    let (many, _) = codes("0.9");
    assert!(few.is_empty() && many == ["noise-wins"], "{few:?} {many:?}");
    assert!((0.1..0.9).contains(&break_even), "{break_even}");
}

/// Zalka 1999: on four machines the space is best split, and the time falls to about half.
#[test]
fn shallow_machines_guess_bits() {
    let one = plan(&["--space", "2^20", "--count", "1", "--machines", "1"]);
    let four = plan(&["--space", "2^20", "--count", "1", "--machines", "4"]);
    assert_eq!((&one["split"]["guessed_bits"], &four["split"]["guessed_bits"]), (&0.into(), &2.into()));
    let time = |plan: &Value| plan["split"]["time"].as_str().unwrap().parse::<f64>().unwrap();
    assert!((1.8..2.2).contains(&(time(&one) / time(&four))), "{} {}", time(&one), time(&four));
    let shallow = plan(&["--space", "2^20", "--count", "1", "--depth", "10"]);
    assert!(shallow["split"]["iterations"].as_u64().unwrap() <= 10 && shallow["split"]["guessed_bits"] != 0);
}

/// Feller I, IX.3: ten solutions are all seen after 10 H_10 = 29.2896825... successes on average.
#[test]
fn all_solutions() {
    let all = &plan(&["--space", "1024", "--count", "10", "--find-all"])["find_all"];
    near(&all["successes"], 29.289682539682538);
}

#[test]
fn numbers_beyond_floating_point() {
    let plan = plan(&["--space", "2^5000", "--count", "1"]);
    assert_eq!((&plan["success"], plan["iterations"].as_str().unwrap().len()), (&1.0.into(), 753));
    let long = Desk::new().text(&["plan", "--space", "2^20000", "--count", "1"]);
    assert!(long.contains("iterations  2^9999.65"), "{long}");
}

#[test]
fn questions_without_an_answer() {
    let desk = Desk::new();
    desk.file("free.cnf", "p cnf 4 0\n");
    for (arguments, code) in [
        (&["--space", "0"][..], "U005"),
        (&["--space", "8", "--count", "9"], "U002"),
        (&["--space", "8", "--low", "5", "--high", "4"], "U002"),
        (&["--space", "8", "--high", "9"], "U002"),
        (&["--space", "8", "--aim", "certainty"], "U006"),
        (&["--space", "8", "--find-all"], "U006"),
        (&["--space", "8", "--low", "1", "--error", "0.1"], "U006"),
        (&["--space", "8", "--count", "1", "--aim", "highest-within-bound"], "U007"),
        (&["--space", "8", "--high", "4", "--aim", "at-least-so-many"], "U008"),
        (&["--space", "8", "--count", "1", "--depth", "2", "--try-cost", "0"], "U009"),
        (&["--space", "8", "--aim", "fastest"], "U001"),
        (&["--space", "eight"], "U001"),
        (&["--space", "8", "--count", "1", "--low", "1"], "U001"),
        (&["--space", "8", "--error", "1.5"], "U001"),
        (&["--space", "8", "--failure", "1"], "U001"),
        (&["--space", "2^99999"], "U001"),
        (&["--space", "8", "--count", "1", "--within", "2^5000"], "U001"),
        (&["free.cnf", "--space", "8"], "U001"),
        (&[], "U001"),
    ] {
        let (exit, object) = desk.json(&[&["plan"], arguments].concat());
        assert_eq!((exit, &object["error"]["code"]), (2, &code.into()), "{arguments:?} {object:#}");
    }
}

/// Three variables of which one string of eight is a solution.
const RARE: &str = "pick a\npick b\npick c\nmust a and b and not c\n";

#[test]
fn a_problem_is_counted_only_where_the_aim_rests_on_it() {
    let desk = Desk::new();
    desk.file("p.tally", RARE);
    let (_, counted) = desk.json(&["plan", "p.tally", "--aim", "certainty"]);
    assert_eq!((&counted["tally"]["count"], &counted["plan"]["iterations"]), (&"1".into(), &"2".into()));
    let (exit, unknown) = desk.json(&["plan", "p.tally", "--aim", "nothing-known"]);
    assert_eq!((exit, &unknown["tally"], &unknown["plan"]["aim"]), (0, &Value::Null, &"nothing-known".into()));
    // The error of a gate is multiplied out: 1 - (1 - e)^gates.
    let (_, gates) = desk.json(&["plan", "p.tally", "--gate-error", "0.001"]);
    let number = gates["gates_of_iteration"].as_f64().unwrap();
    assert!(number > 10.0);
    near(&gates["plan"]["noise"]["error"], 1.0 - 0.999f64.powf(number));
}

#[test]
fn results_that_agree_with_the_plan() {
    let desk = Desk::new();
    desk.file("p.tally", RARE);
    // Two iterations: 121/128 = 0.945. a and b and not c is the string 011 with bit 0 last.
    desk.file("good.txt", "011 945\n000 30\n111 25\n");
    let (exit, object) = desk.json(&["shots", "p.tally", "good.txt"]);
    let shots = &object["shots"];
    assert_eq!(
        (exit, &object["command"], &shots["hits"], &shots["shots"]),
        (0, &"shots".into(), &945.into(), &1000.into())
    );
    near(&shots["predicted"]["success_high"], 0.9453125);
    assert_eq!(shots["comparison"]["contradicts"], false);
    assert_eq!(shots["answers"][0]["values"]["a"], "yes");
    assert_eq!((&shots["answers"][0]["holds"], &shots["answers"][1]["holds"]), (&true.into(), &false.into()));
    let text = desk.text(&["shots", "p.tally", "good.txt", "--list", "1"]);
    assert!(text.contains("do not contradict") && text.contains("and 2 other strings"), "{text}");
}

#[test]
fn results_that_contradict_the_plan() {
    let desk = Desk::new();
    desk.file("p.tally", RARE);
    desk.file("noisy.csv", "bits,count\n011,500\n000,300\n111,200\n");
    let (exit, object) = desk.json(&["shots", "p.tally", "noisy.csv"]);
    let comparison = &object["shots"]["comparison"];
    assert_eq!((exit, &comparison["contradicts"]), (1, &true.into()), "{object:#}");
    // (1 - q)^2 (121/128 - 1/8) + 1/8 = 1/2.
    near(&comparison["error_per_iteration"], 1.0 - (0.375f64 / 0.8203125).sqrt());
    // One iteration was run: 25/32 = 0.78; six are 0.9998; for half the states marked none is planned.
    for (iterations, success) in [("1", 0.78125), ("6", 32761.0 / 32768.0)] {
        let (exit, object) = desk.json(&["shots", "p.tally", "noisy.csv", "--iterations", iterations]);
        assert_eq!(exit, 1);
        near(&object["shots"]["predicted"]["success_low"], success);
    }
    let (exit, object) = desk.json(&["shots", "p.tally", "noisy.csv", "--count", "4"]);
    assert_eq!((exit, &object["shots"]["predicted"]["iterations"]), (0, &"0".into()), "{object:#}");
}

#[test]
fn orders_layouts_and_places_of_results() {
    let desk = Desk::new();
    desk.file("p.tally", RARE);
    desk.file("turned.json", "{\"110\": 95, \"000\": 5}");
    let hits = |arguments: &[&str]| {
        let (_, object) = desk.json(&[&["shots", "p.tally", "turned.json"], arguments].concat());
        object["shots"]["hits"].as_u64()
    };
    assert_eq!(hits(&[]), Some(0));
    assert_eq!(hits(&["--zero", "first"]), Some(95));
    assert_eq!(hits(&["--zero", "first", "--format", "json"]), Some(95));
    assert_eq!(hits(&["--format", "lines"]), None);
    desk.exit(&["compile", "p.tally", "-o", "p.qasm"]);
    let places = std::fs::read_to_string(desk.path("p.places.json")).unwrap();
    let mut value: Value = serde_json::from_str(&places).unwrap();
    value["searched"].as_array_mut().unwrap().reverse();
    for variable in value["variables"].as_array_mut().unwrap() {
        for qubit in variable["qubits"].as_array_mut().unwrap() {
            let at: usize = qubit.as_str().unwrap()["search[".len()..].trim_end_matches(']').parse().unwrap();
            *qubit = format!("search[{}]", 2 - at).into();
        }
    }
    desk.file("turned.places.json", &value.to_string());
    assert_eq!(hits(&["--places", "turned.places.json"]), Some(95));
}

#[test]
fn results_that_cannot_be_read() {
    let desk = Desk::new();
    desk.file("p.tally", RARE);
    desk.file("wide.txt", "0110 3\n");
    desk.file("free.cnf", "p cnf 0 0\n");
    for (arguments, code) in [
        (&["p.tally", "wide.txt"][..], "S003"),
        (&["p.tally", "missing.txt"], "F093"),
        (&["p.tally", "wide.txt", "--zero", "middle"], "U001"),
        (&["free.cnf", "wide.txt"], "C001"),
        (&["-", "-"], "U010"),
    ] {
        let (exit, object) = desk.json(&[&["shots"], arguments].concat());
        assert_eq!((exit, &object["error"]["code"]), (2, &code.into()), "{arguments:?} {object:#}");
    }
    let (_, object) = desk.json(&["shots", "p.tally", "wide.txt"]);
    assert_eq!((&object["error"]["file"], &object["error"]["line"]), (&"wide.txt".into(), &1.into()));
}
