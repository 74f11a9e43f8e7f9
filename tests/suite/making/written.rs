//! What is written reads back: registers, blocks and gates.

use tallymark::circuit::qasm::{read, write};
use tallymark::circuit::{Circuit, Condition, Control, Level, Mark, MeasuredId, Op, QubitId};
use tallymark::search::whole::whole_search;
use tallymark::span::Sources;

use super::{network_of, oracle, some_problems};

type Plain<'a> = (Op, &'a [Control], QubitId, Option<Condition>, Option<MeasuredId>);

fn gates(circuit: &Circuit) -> Vec<(u64, Plain<'_>)> {
    let mut list = Vec::new();
    for block in circuit.blocks() {
        for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
            let plain = (gate.op(), circuit.controls(gate), gate.target(), gate.condition(), gate.measured());
            list.push((block.repeat, plain));
        }
    }
    list
}

fn check(circuit: &Circuit) {
    let mut text = Vec::new();
    write::write(circuit, &["a test".to_owned()], &mut text).unwrap();
    let text = String::from_utf8(text).unwrap();
    let back =
        read::read(&text, "test.qasm", &mut Sources::new()).unwrap_or_else(|faults| panic!("{faults:?}\n{text}"));
    assert_eq!((&back.qubits, &back.measured), (&circuit.qubits, &circuit.measured));
    assert_eq!(gates(&back), gates(circuit), "{text}");
}

#[test]
fn written_oracles_and_searches_read_back() {
    for (_, problem) in some_problems(25, 8) {
        let network = network_of(&problem);
        for level in Level::ALL {
            for mark in [Mark::Phase, Mark::Bit] {
                let Some(circuit) = oracle(&network, level, mark) else { continue };
                check(&circuit);
                [0, 1, 5].iter().for_each(|&iterations| check(&whole_search(&circuit, iterations, level)));
            }
        }
    }
}
