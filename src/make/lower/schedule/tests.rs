use super::cells::cells;
use super::front::front;

use super::program::Pay;
use crate::budget::Budget;

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

fn print(m: usize, pay: Pay) {
    let network = conjunction(m);
    let cells = cells(&network, true);
    let start = std::time::Instant::now();
    let front = front(&cells, pay, &Budget::unlimited()).unwrap();
    eprintln!("{m} {pay:?} {:?}", start.elapsed());
    let at: &[usize] = if m == 100 { &[10,15,16,28,101,199] } else { &[14,21,23,29,30,88,89,1001,1999] };
    for point in at.iter().filter_map(|p| front.iter().rfind(|x| x.cost.ancillas <= *p)) {
        eprint!("{}:{}/{}/{} ", point.cost.ancillas, point.cost.paid(pay), point.cost.worst, point.cost.erased);
    }
    eprintln!();
}

#[test]
fn look() {
    for pay in [Pay::Expected, Pay::Worst, Pay::Unitary] {
        
        print(100, pay);
        print(1000, pay);
    }
}
