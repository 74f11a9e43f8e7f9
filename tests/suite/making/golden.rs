//! Golden circuits: `tests/cases/making/*.case` hold a tiny problem, options and the expected OpenQASM text.
//! `BLESS=1` rewrites what stands after the line `---- expect`.
//!
//! The problem is written as data, one item a line: `var NAME LO HI`, `bit NAME`, `clause LITERALS`, and `must` with an
//! expression in brackets: `must (le (sum a b) 4)`.

use std::fs;
use std::path::Path;

use tallymark::budget::Budget;
use tallymark::circuit::{Circuit, Level, Mark, qasm};
use tallymark::make::lower::{Options, lower};
use tallymark::problem::check::check;
use tallymark::problem::{BitLit, Compare, Domain, Expr, ExprId, Origin, Problem};
use tallymark::search::whole::whole_search;

use super::network_of;

const SEPARATOR: &str = "---- expect\n";
const LEAST_CASES: usize = 12;

struct Case {
    problem: Problem,
    level: Level,
    mark: Mark,
    iterations: Option<u64>,
    names: Vec<(String, ExprId)>,
}

impl Case {
    fn read(text: &str) -> Self {
        let mut case =
            Case { problem: Problem::new(), level: Level::Wide, mark: Mark::Phase, iterations: None, names: vec![] };
        for line in text.lines().filter(|line| !line.trim().is_empty()) {
            let (word, rest) = line.split_once(' ').unwrap_or((line, ""));
            match word {
                "#" => {}
                "run" => rest.split(' ').for_each(|option| case.option(option)),
                "var" => {
                    let parts: Vec<&str> = rest.split(' ').collect();
                    let domain = Domain::Range { lo: parts[1].parse().unwrap(), hi: parts[2].parse().unwrap() };
                    case.declare(parts[0], domain);
                }
                "bit" => case.declare(rest, Domain::YesNo),
                "clause" => {
                    let lits = rest.split(' ').map(|lit| BitLit::from_dimacs(lit.parse().unwrap()).unwrap());
                    case.problem.clauses.push(&lits.collect::<Vec<_>>());
                }
                "must" => {
                    let spaced = rest.replace('(', " ( ").replace(')', " ) ");
                    let expr = case.expr(&mut spaced.split_whitespace());
                    case.problem.must(expr, Origin::default());
                }
                other => panic!("no such item: {other}"),
            }
        }
        check(&case.problem).unwrap();
        case
    }

    fn declare(&mut self, name: &str, domain: Domain) {
        let var = self.problem.add_var(name, domain, None);
        self.names.push((name.to_owned(), self.problem.exprs.node(Expr::Var(var))));
    }

    fn option(&mut self, option: &str) {
        if let Some(level) = Level::ALL.into_iter().find(|level| level.name() == option) {
            self.level = level;
        } else if let Some(iterations) = option.strip_prefix("whole=") {
            self.iterations = Some(iterations.parse().unwrap());
        } else {
            self.mark = match option {
                "phase" => Mark::Phase,
                "bit" => Mark::Bit,
                other => panic!("no such option: {other}"),
            };
        }
    }

    fn expr<'a>(&mut self, tokens: &mut impl Iterator<Item = &'a str>) -> ExprId {
        self.operand(tokens).expect("an expression, not a closing bracket")
    }

    fn operand<'a>(&mut self, tokens: &mut impl Iterator<Item = &'a str>) -> Option<ExprId> {
        let token = tokens.next().expect("a closing bracket");
        match token {
            ")" => None,
            "(" => {
                let word = tokens.next().expect("an operator");
                let mut operands = Vec::new();
                while let Some(operand) = self.operand(tokens) {
                    operands.push(operand);
                }
                Some(self.operation(word, &operands))
            }
            _ => Some(match token.parse() {
                Ok(number) => self.problem.exprs.node(Expr::Number(number)),
                Err(_) => self.names.iter().find(|(name, _)| name == token).expect("a declared name").1,
            }),
        }
    }

    fn operation(&mut self, word: &str, operands: &[ExprId]) -> ExprId {
        let exprs = &mut self.problem.exprs;
        let make = match word {
            "all" => Expr::All,
            "some" => Expr::Some,
            "odd" => Expr::Odd,
            "count" => Expr::Count,
            "sum" => Expr::Sum,
            "different" => Expr::Different,
            "not" => return exprs.node(Expr::Not(operands[0])),
            "number" => return exprs.node(Expr::AsNumber(operands[0])),
            "product" => return exprs.node(Expr::Product(operands[0], operands[1])),
            "eq" | "ne" | "lt" | "le" => {
                let all = [("eq", Compare::Eq), ("ne", Compare::Ne), ("lt", Compare::Lt), ("le", Compare::Le)];
                let compare = all.into_iter().find(|(name, _)| *name == word).unwrap().1;
                return exprs.node(Expr::Compare(compare, operands[0], operands[1]));
            }
            other => panic!("no such operator: {other}"),
        };
        exprs.over(make, operands)
    }

    fn circuit(&self) -> Circuit {
        let options = Options { level: self.level, mark: self.mark };
        let oracle = lower(&network_of(&self.problem), &options, &Budget::unlimited()).unwrap();
        self.iterations.map_or(oracle.clone(), |iterations| whole_search(&oracle, iterations, self.level))
    }

    fn text(&self) -> String {
        let mut out = Vec::new();
        qasm::write::write(&self.circuit(), &[], &mut out).unwrap();
        String::from_utf8(out).unwrap()
    }
}

#[test]
fn circuits_are_the_expected_ones() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/cases/making");
    let mut files: Vec<_> = fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.sort();
    assert!(files.len() >= LEAST_CASES, "only {} cases", files.len());
    let mut differing = Vec::new();
    for file in files {
        assert_eq!(file.extension().unwrap(), "case", "{} is not a case", file.display());
        let text = fs::read_to_string(&file).unwrap();
        let (input, expected) = text.split_once(SEPARATOR).unwrap_or((&text, ""));
        let case = Case::read(input);
        let found = case.text();
        assert_eq!(found, Case::read(input).text(), "{}: same input, same bytes", file.display());
        if std::env::var_os("BLESS").is_some() {
            fs::write(&file, format!("{input}{SEPARATOR}{found}")).unwrap();
        } else if found != expected {
            differing.push(format!("{}: expected\n{expected}\nfound\n{found}", file.display()));
        }
    }
    assert!(differing.is_empty(), "{}", differing.join("\n"));
}
