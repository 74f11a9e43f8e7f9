use super::cells::{Cells, cells};
use super::front::front;
use super::line::Line;
use super::program::{Cost, Move, backwards, cost};
use crate::budget::Budget;
use crate::circuit::Level;
use crate::make::network::Network;

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

fn print(m: usize, level: Level) {
    let network = conjunction(m);
    let cells = cells(&network, true);
    let start = std::time::Instant::now();
    let front = front(&cells, level, &Budget::unlimited()).unwrap();
    eprintln!("{m} {level} {:?}", start.elapsed());
    for point in front {
        eprint!("{}:{}/{}/{} ", point.cost.ancillas, point.cost.at(level), point.cost.worst, point.cost.erased);
    }
    eprintln!();
}

#[test]
fn look() {
    for level in [Level::Feedback, Level::CliffordT] {
        print(20, level);
        print(100, level);
        print(1000, level);
    }
}
