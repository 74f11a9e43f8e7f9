//! Schedules against published tables, and what they say they cost against the gates.

use super::cells::{Cell, CellId, Cells, Form, Term, cells};
use super::counter;
use super::exact;
use super::fixed;
use super::front::front;
use super::line::Line;
use super::program::{Cost, Move, Pay, backwards, cost};
use super::table::Game;
use crate::budget::Budget;
use crate::circuit::figures::figures;
use crate::circuit::{Level, Mark};
use crate::id::{Id, IdVec};
use crate::make::lower::Options;
use crate::make::lower::replay::{Marking, replay};
use crate::make::network::Network;
use crate::problem::{BitId, BitLit, Problem};

/// The AND of `m` clauses of three literals each, nothing shared.
fn conjunction(m: usize) -> Network {
    let mut text = "search".to_owned();
    (0..3 * m).for_each(|at| text += &format!(" b{at}"));
    let mut next = 3 * m + 1;
    let mut gathered = String::new();
    for clause in 0..m {
        let [a, b, c] = [1, 2, 3].map(|at| 3 * clause + at);
        text += &format!("\nn{next} = and n{a} n{b}\nn{} = and n{c} n{next}", next + 1);
        next += 2;
        if gathered.is_empty() {
            gathered = format!("!n{}", next - 1);
        } else {
            text += &format!("\nn{next} = and {gathered} !n{}", next - 1);
            gathered = format!("n{next}");
            next += 1;
        }
    }
    format!("{text}\nroot {gathered}\n").parse().unwrap()
}

/// A line: each cell is the AND of the one before it and an input of its own; the last is marked.
fn line(n: usize) -> Cells {
    let mut list: IdVec<CellId, Cell> = IdVec::new();
    let input = |at: usize| Form { inputs: vec![at as u32], ..Form::default() };
    for at in 0..n {
        let before = match at.checked_sub(1) {
            Some(before) => Form { cells: vec![CellId::new(before)], ..Form::default() },
            None => input(n),
        };
        let needs = before.cells.clone();
        list.push(Cell { operands: [before, input(at)], needs, owner: None });
    }
    let last = Form { cells: vec![CellId::new(n - 1)], ..Form::default() };
    Cells {
        list,
        terms: vec![Term::Held(last)],
        root_complemented: false,
        chain: vec![],
        items: vec![],
        groups: vec![],
    }
}

/// The moves of a game that ends with the last node alone, and of one that reaches it.
type Games = (Option<usize>, Option<usize>);

/// The moves of the two games on a line: end with only the last node held, and merely reach it.
fn moves(n: usize, pebbles: usize) -> Games {
    let cells = line(n);
    let order: Vec<CellId> = cells.list.ids().collect();
    let line = Line::new(&cells, &order, &order[n - 1..]);
    let clean = line.clean(pebbles);
    if let Some(clean) = &clean {
        let erased: Vec<Move> = clean.iter().cloned().chain([Move::Mark]).chain(backwards(clean)).collect();
        assert!(cost(&cells, &erased).unwrap().ancillas <= pebbles);
    }
    (clean.map(|moves| moves.len()), line.visit(pebbles).map(|moves| moves.len()))
}

/// Exact values by breadth-first search over all states (n up to 14), and by E. Knill's recursion beyond, "An analysis of
/// Bennett's pebble game" (1995); p = n gives 2n - 1 (C. H. Bennett, SIAM J. Comput. 18:766, 1989).
#[test]
fn lines_take_the_fewest_moves_for_each_number_of_pebbles() {
    for (n, table) in [
        (2, &[(2, 3)][..]),
        (3, &[(3, 5)]),
        (4, &[(3, 9), (4, 7)]),
        (5, &[(4, 11), (5, 9)]),
        (6, &[(4, 15), (5, 13), (6, 11)]),
        (7, &[(4, 19), (5, 17), (6, 15), (7, 13)]),
        (8, &[(4, 25), (5, 21), (6, 19), (7, 17), (8, 15)]),
        (9, &[(5, 25), (6, 23), (7, 21), (8, 19), (9, 17)]),
        (10, &[(5, 29), (6, 27), (10, 19)]),
        (12, &[(5, 39), (6, 35), (7, 33), (12, 23)]),
        (14, &[(5, 53), (6, 43), (7, 41), (14, 27)]),
        (16, &[(5, 71), (6, 51), (7, 49), (16, 31)]),
        (32, &[(6, 193), (7, 145), (8, 117), (32, 63)]),
    ] {
        for &(pebbles, fewest) in table {
            assert_eq!(moves(n, pebbles).0, Some(fewest), "{n} nodes, {pebbles} pebbles");
        }
    }
}

/// The fewest pebbles: ceil(log2 n) + 1 to end with the last node alone, ceil(log2 (n + 1)) to reach it; and the fewest
/// moves to reach it (breadth-first search).
#[test]
fn lines_take_the_fewest_pebbles_in_both_games() {
    for n in 2..=16usize {
        let log = |n: usize| n.next_power_of_two().ilog2() as usize;
        let fewest =
            |reached: fn(Games) -> Option<usize>| (1..=n).find(|&pebbles| reached(moves(n, pebbles)).is_some());
        assert_eq!(fewest(|games| games.0), Some(log(n) + 1), "{n} nodes, the last alone");
        assert_eq!(fewest(|games| games.1), Some(log(n + 1)), "{n} nodes, reached");
    }
    for (n, pebbles, fewest) in [
        (2, 2, 2),
        (3, 2, 4),
        (3, 3, 3),
        (4, 3, 5),
        (4, 4, 4),
        (5, 3, 7),
        (6, 3, 9),
        (7, 3, 13),
        (7, 4, 10),
        (7, 5, 9),
        (8, 4, 12),
        (11, 4, 20),
        (11, 5, 17),
        (15, 4, 38),
        (15, 5, 25),
        (15, 6, 24),
    ] {
        assert_eq!(moves(n, pebbles).1, Some(fewest), "{n} nodes, {pebbles} pebbles");
    }
}

/// On lines of up to seven nodes the exact search finds what breadth-first search does, and nothing shorter; on a network
/// in which two nodes share a third, no other schedule takes fewer moves.
#[test]
fn the_exact_search_finds_the_fewest_moves() {
    for n in 2..=exact::MOST_CELLS {
        let cells = line(n);
        let order: Vec<CellId> = cells.list.ids().collect();
        for pebbles in 1..n {
            let known = moves(n, pebbles).1;
            let found = exact::visit(&cells, &order, &order[n - 1..], pebbles, known.unwrap_or(4 * n) + 1);
            assert_eq!(found.map(|moves| moves.len()), known, "{n} nodes, {pebbles} pebbles");
            if let Some(known) = known {
                assert_eq!(exact::visit(&cells, &order, &order[n - 1..], pebbles, known), None);
            }
        }
    }
    let shared =
        "search b0 b1 b2 b3\nn5 = and n1 n2\nn6 = and n3 !n5\nn7 = and n4 !n5\nn8 = and !n6 !n7\nn9 = and n1 !n8\n";
    let network: Network = format!("{shared}n10 = and n2 !n8\nn11 = xor n9 n10\nroot n11\n").parse().unwrap();
    let cells = cells(&network, true);
    let wanted = cells.marked_from();
    let order = cells.cone(&wanted, |_| false);
    let line = Line::new(&cells, &order, &wanted);
    for room in 1..order.len() {
        let other = line.visit(room).map(|moves| moves.len());
        let found = exact::visit(&cells, &order, &wanted, room, other.unwrap_or(16) + 1);
        match (other, found) {
            (Some(other), Some(found)) => assert!(found.len() <= other, "{room}"),
            (Some(_), None) => panic!("{room}: a schedule is known"),
            (None, _) => {}
        }
    }
}

fn points(m: usize, pay: Pay) -> Vec<Cost> {
    let mut cells = cells(&conjunction(m), true);
    counter::group(&mut cells);
    front(&cells, pay, &Budget::unlimited()).unwrap().into_iter().map(|point| point.cost).collect()
}

/// A dynamic programme over all splits of a conjunction of opaque clauses of three literals gave these costs in ANDs:
/// with measured erasure on average and at worst, and without measurement. Where a hundred clauses are kept whole the
/// circuit that keeps everything is used instead of a schedule.
#[test]
fn conjunctions_cost_what_a_dynamic_programme_gives() {
    let check = |m: usize, pay: Pay, table: &[(usize, f64)]| {
        let points = points(m, pay);
        for &(ancillas, aim) in table {
            let best = points.iter().rfind(|cost| cost.ancillas <= ancillas).expect("it fits").paid(pay);
            assert!(best <= aim, "{m} clauses, {ancillas} ancillas, {pay:?}: {best}");
        }
    };
    check(100, Pay::Expected, &[(199, 348.0), (101, 446.0), (28, 433.0), (16, 578.0), (15, 590.0), (10, 933.0)]);
    check(100, Pay::Worst, &[(199, 398.0), (101, 594.0), (28, 568.0), (16, 948.0), (15, 980.0), (10, 2007.0)]);
    check(100, Pay::Unitary, &[(199, 796.0), (101, 1398.0), (28, 1136.0), (16, 1904.0), (15, 1980.0), (10, 5072.0)]);
    check(1000, Pay::Expected, &[(1001, 4496.0), (88, 4474.0), (30, 6548.0), (21, 8700.0), (14, 15363.0)]);
    check(1000, Pay::Worst, &[(90, 5908.0), (29, 9255.0), (23, 11006.0), (21, 15007.0)]);
    check(1000, Pay::Unitary, &[(90, 11816.0), (29, 18510.0), (23, 22012.0), (21, 30014.0)]);
}

/// What a program is said to cost is what its gates cost.
#[test]
fn costs_of_programs_are_those_of_the_gates() {
    let network = conjunction(9);
    for (level, pay) in
        [(Level::Feedback, Pay::Expected), (Level::Feedback, Pay::Worst), (Level::Toffoli, Pay::Unitary)]
    {
        let mut cells = cells(&network, true);
        counter::group(&mut cells);
        let points = front(&cells, pay, &Budget::unlimited()).unwrap();
        assert!(points.len() > 8);
        for point in points {
            let options = Options { level, mark: Mark::Phase };
            let size = (27, point.cost.ancillas);
            let circuit = replay(&cells, &point.moves, size, &options, Marking::Sign, &Budget::unlimited()).unwrap();
            let figures = figures(&circuit);
            if level == Level::Feedback {
                assert_eq!(figures.t_count, 4 * point.cost.worst);
                assert!((figures.t_count_expected - 4.0 * point.cost.expected).abs() < 1e-6);
            } else {
                assert_eq!(figures.and_gates, point.cost.worst + point.cost.erased);
            }
            assert_eq!(figures.qubits as usize, 27 + point.cost.ancillas);
        }
    }
}

/// A problem of a DIMACS file without comments between its clauses. (The readers are on the other side of a wall.)
fn of_dimacs(text: &str) -> Problem {
    let mut problem = Problem::new();
    for line in text.lines().filter(|line| !line.starts_with('c')) {
        let words: Vec<&str> = line.split_whitespace().collect();
        if let ["p", "cnf", variables, _] = words[..] {
            problem.add_numbered_vars(variables.parse().unwrap());
            continue;
        }
        let numbers = words.iter().map(|word| word.parse::<i64>().unwrap()).filter(|&number| number != 0);
        let literal = |number: i64| BitLit::new(BitId::new(number.unsigned_abs() as usize - 1), number < 0);
        problem.clauses.push(&numbers.map(literal).collect::<Vec<_>>());
    }
    problem
}

/// On problems of this repository: keeping everything, two levels of equal chunks, and counting, each at each size.
#[test]
fn the_front_is_never_behind_a_fixed_schedule_on_real_problems() {
    use crate::make::network::{Places, build};
    let folder = concat!(env!("CARGO_MANIFEST_DIR"), "/problems");
    let mut compared = 0;
    for file in ["even-streets.cnf", "ring-colours.cnf", "smaller-number.cnf"] {
        let problem = of_dimacs(&std::fs::read_to_string(format!("{folder}/{file}")).unwrap());
        let network = build(&problem, &Places::as_given(&problem));
        let mut cells = cells(&network, true);
        counter::group(&mut cells);
        for pay in [Pay::Expected, Pay::Worst, Pay::Unitary] {
            let front = front(&cells, pay, &Budget::unlimited()).unwrap();
            let mut fixed = vec![super::front::keep_all(&cells).cost];
            for size in 2..=cells.chain.len() / 2 {
                fixed.push(cost(&cells, &fixed::two_levels(&cells, size, Game::of(pay))).unwrap());
            }
            for size in 0..cells.groups.len() {
                let counted = (0..=64).filter_map(|room| counter::schedule(&cells, size, room));
                fixed.extend(counted.map(|moves| cost(&cells, &moves).unwrap()));
            }
            for one in &fixed {
                let as_good = |point: &super::front::Point| {
                    point.cost.ancillas <= one.ancillas && point.cost.paid(pay) <= one.paid(pay)
                };
                assert!(front.iter().any(as_good), "{file} {pay:?}: {one:?}");
            }
            compared += fixed.len();
        }
    }
    assert!(compared > 30, "{compared}");
}
