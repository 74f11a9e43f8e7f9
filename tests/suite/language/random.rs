//! Random expressions, written with no more brackets than their grouping needs: what is read means what was meant, on
//! every assignment. The meaning is computed while the text is made, by closures, without the library.

use std::rc::Rc;

use tallymark::random::SplitMix64;
use tallymark::source::tally;
use tallymark::span::Sources;

const HEAD: &str = "known row = [3, -1, 4, 1]\nkind Port = bow | stern | keel\n\
                    pick a\npick b\npick x in -2 to 3\npick y in 1 to 4\npick p in Port\n";

/// The values of a, b, x, y, p.
type Values = [i64; 5];

/// An expression: its text, how tightly it holds together, whether it ends in an open `if`, its value.
#[derive(Clone)]
struct Piece {
    text: String,
    level: u8,
    open: bool,
    value: Rc<dyn Fn(&Values) -> i64>,
}

// How tightly operators hold: needs, and/or, not, comparisons, sums, products, minus, all else.
const NEEDS: u8 = 0;
const LOGIC: u8 = 1;
const NOT: u8 = 2;
const COMPARE: u8 = 3;
const SUM: u8 = 4;
const PRODUCT: u8 = 5;
const MINUS: u8 = 6;
const ATOM: u8 = 7;

fn piece(text: impl Into<String>, level: u8, value: impl Fn(&Values) -> i64 + 'static) -> Piece {
    Piece { text: text.into(), level, open: false, value: Rc::new(value) }
}

/// The text of an operand that something follows.
fn inner(piece: &Piece, level: u8) -> String {
    if piece.level < level || piece.open { format!("({})", piece.text) } else { piece.text.clone() }
}

/// The text of a last operand, and whether the whole now ends in an open `if`.
fn last(piece: &Piece, level: u8, random: &mut SplitMix64) -> (String, bool) {
    if piece.level < level || piece.open && random.coin() {
        (format!("({})", piece.text), false)
    } else {
        (piece.text.clone(), piece.open)
    }
}

fn binary(
    sign: &str,
    level: u8,
    sides: (u8, u8),
    operands: (Piece, Piece),
    random: &mut SplitMix64,
    meaning: fn(i64, i64) -> i64,
) -> Piece {
    let (a, b) = operands;
    let (right, open) = last(&b, sides.1, random);
    let text = format!("{} {sign} {right}", inner(&a, sides.0));
    Piece { open, ..piece(text, level, move |v| meaning((a.value)(v), (b.value)(v))) }
}

fn prefix(sign: &str, level: u8, a: Piece, random: &mut SplitMix64, meaning: fn(i64) -> i64) -> Piece {
    let (text, open) = last(&a, level, random);
    Piece { open, ..piece(format!("{sign}{text}"), level, move |v| meaning((a.value)(v))) }
}

fn choice(condition: Piece, a: Piece, b: Piece) -> Piece {
    let text = format!("if {} then {} else {}", condition.text, a.text, b.text);
    let value = move |v: &Values| if (condition.value)(v) == 1 { (a.value)(v) } else { (b.value)(v) };
    Piece { open: true, ..piece(text, ATOM, value) }
}

fn over(word: &str, items: Vec<Piece>, meaning: fn(Vec<i64>) -> i64) -> Piece {
    let texts: Vec<&str> = items.iter().map(|item| item.text.as_str()).collect();
    let text = format!("{word} [{}]", texts.join(", "));
    piece(text, ATOM, move |v| meaning(items.iter().map(|item| (item.value)(v)).collect()))
}

fn several(make: fn(&mut SplitMix64, u32) -> Piece, random: &mut SplitMix64, depth: u32) -> Vec<Piece> {
    (0..1 + random.below(3)).map(|_| make(random, depth)).collect()
}

fn condition(random: &mut SplitMix64, depth: u32) -> Piece {
    let choices = if depth == 0 { 4 } else { 19 };
    let deeper = depth.saturating_sub(1);
    match random.below(choices) {
        0 => piece("a", ATOM, |v| v[0]),
        1 => piece("b", ATOM, |v| v[1]),
        2 => piece("yes", ATOM, |_| 1),
        3 => piece("p = stern", COMPARE, |v| i64::from(v[4] == 1)),
        4 => prefix("not ", NOT, condition(random, deeper), random, |a| 1 - a),
        5 => {
            let sides = (condition(random, deeper), condition(random, deeper));
            binary("needs", NEEDS, (LOGIC, NEEDS), sides, random, |a, b| (1 - a) | b)
        }
        6 | 7 => {
            let sides = (condition(random, deeper), condition(random, deeper));
            binary("and", LOGIC, (NOT, NOT), sides, random, |a, b| a & b)
        }
        8 | 9 => {
            let sides = (condition(random, deeper), condition(random, deeper));
            binary("or", LOGIC, (NOT, NOT), sides, random, |a, b| a | b)
        }
        10 => {
            let sides = (condition(random, deeper), condition(random, deeper));
            binary("!=", COMPARE, (SUM, SUM), sides, random, |a, b| a ^ b)
        }
        11 => {
            let sides = (number(random, deeper), number(random, deeper));
            binary("<=", COMPARE, (SUM, SUM), sides, random, |a, b| i64::from(a <= b))
        }
        12 => {
            let sides = (number(random, deeper), condition(random, deeper));
            binary(">", COMPARE, (SUM, SUM), sides, random, |a, b| i64::from(a > b))
        }
        13 => choice(condition(random, deeper), condition(random, deeper), condition(random, deeper)),
        14 => over("odd", several(condition, random, deeper), |all| all.iter().sum::<i64>() % 2),
        15 => over("at most 1 of", several(condition, random, deeper), |all| i64::from(all.iter().sum::<i64>() <= 1)),
        16 => over("none of", several(condition, random, deeper), |all| i64::from(!all.contains(&1))),
        17 => over("different", several(number, random, deeper), |mut all| {
            let count = all.len();
            all.sort_unstable();
            all.dedup();
            i64::from(all.len() == count)
        }),
        _ => {
            let a = number(random, deeper);
            let text = format!("{} one of [1, y, -1]", inner(&a, SUM));
            piece(text, COMPARE, move |v| i64::from([1, v[3], -1].contains(&(a.value)(v))))
        }
    }
}

fn number(random: &mut SplitMix64, depth: u32) -> Piece {
    let choices = if depth == 0 { 4 } else { 17 };
    let deeper = depth.saturating_sub(1);
    match random.below(choices) {
        0 => piece("x", ATOM, |v| v[2]),
        1 => piece("y", ATOM, |v| v[3]),
        2 => piece("row[y]", ATOM, |v| [3, -1, 4, 1][v[3] as usize - 1]),
        3 => {
            let value = random.below(5) as i64;
            piece(value.to_string(), ATOM, move |_| value)
        }
        4 | 5 => {
            let sides = (number(random, deeper), number(random, deeper));
            binary("+", SUM, (SUM, PRODUCT), sides, random, |a, b| a + b)
        }
        6 | 7 => {
            let sides = (number(random, deeper), number(random, deeper));
            binary("-", SUM, (SUM, PRODUCT), sides, random, |a, b| a - b)
        }
        8 | 9 => {
            let sides = (number(random, deeper), number(random, deeper));
            binary("*", PRODUCT, (PRODUCT, MINUS), sides, random, |a, b| a * b)
        }
        10 => {
            let sides = (number(random, deeper), piece("3", ATOM, |_| 3));
            binary("mod", PRODUCT, (PRODUCT, MINUS), sides, random, |a, b| ((a % b) + b) % b)
        }
        11 => {
            let sides = (number(random, deeper), piece("2", ATOM, |_| 2));
            binary("/", PRODUCT, (PRODUCT, MINUS), sides, random, |a, b| (a - ((a % b) + b) % b) / b)
        }
        12 => prefix("-", MINUS, number(random, deeper), random, |a| -a),
        13 => {
            let a = number(random, deeper);
            piece(format!("abs({})", a.text), ATOM, move |v| (a.value)(v).abs())
        }
        14 => choice(condition(random, deeper), number(random, deeper), number(random, deeper)),
        15 => over("smallest", several(number, random, deeper), |all| all.into_iter().fold(i64::MAX, i64::min)),
        _ => over("number of", several(condition, random, deeper), |all| all.iter().sum()),
    }
}

#[test]
fn random_expressions_mean_what_was_meant() {
    let mut random = SplitMix64::new(3);
    let mut both = 0;
    for _ in 0..1500 {
        let meant = condition(&mut random, 4);
        let text = format!("{HEAD}must {}\n", meant.text);
        let mut sources = Sources::new();
        let read = tally::read(&text, "random", &[], &mut sources);
        let (problem, _) = read.unwrap_or_else(|mistakes| panic!("{text}\n{mistakes:#?}"));
        let mut seen = [false; 2];
        for code in 0..2 * 2 * 6 * 4 * 3i64 {
            let values = [code % 2, code / 2 % 2, code / 4 % 6 - 2, code / 24 % 4 + 1, code / 96];
            let bits = problem.encode(&values).expect("inside the domains");
            let wanted = (meant.value)(&values) == 1;
            assert_eq!(problem.holds(&bits), wanted, "{text}\nunder a, b, x, y, p = {values:?}");
            seen[usize::from(wanted)] = true;
        }
        both += u32::from(seen == [true, true]);
    }
    // The texts are worth reading: most of them are neither always yes nor always no.
    assert!(both > 700, "{both}");
}
