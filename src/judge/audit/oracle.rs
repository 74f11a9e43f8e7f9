//! What a circuit must be to be judged as an oracle: its registers, and what it does to one basis state.
//!
//! [`Roles`] are checked once. [`trace`] is the plain reading of the gates on one basis state, with no rows and no
//! absorbed gates; every witness is explained by it, so that the fast kernel cannot accuse a circuit alone.

use crate::circuit::{Block, Circuit, Gate, MARK, Op, QubitId, SEARCH, WORK};
use crate::id::Id;
use crate::judge::audit::AuditError;
use crate::places::Places;
use crate::problem::{Bits, Problem};

/// The most gates of a circuit, its repeated blocks written out: about a gigabyte of row operations.
const MAX_GATES: u64 = 1 << 25;

/// The qubits of an oracle by what they are for.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Roles {
    /// The search register.
    pub(crate) search: Vec<QubitId>,
    /// The qubit that a bit oracle writes; a circuit without it is a phase oracle.
    pub(crate) mark: Option<QubitId>,
    /// The clean ancillas.
    pub(crate) work: Vec<QubitId>,
}

/// Finds the registers and checks that they fit the places, and that no input is reset.
pub(crate) fn roles(problem: &Problem, places: &Places, circuit: &Circuit) -> Result<Roles, AuditError> {
    places.check(problem)?;
    if places.search_len() == 0 {
        return Err(AuditError::NothingToSearch);
    }
    let known = |name: &str| [SEARCH, MARK, WORK].contains(&name);
    if let Some(register) = circuit.qubits.iter().find(|register| !known(&register.name)) {
        return Err(AuditError::UnknownRegister(register.name.clone()));
    }
    let size = |name, found, expected| match found == expected {
        true => Ok(()),
        false => Err(AuditError::RegisterSize { name, found, expected }),
    };
    let (search, mark) = (circuit.register(SEARCH), circuit.register(MARK));
    if search.is_empty() {
        return Err(AuditError::NoRegister(SEARCH));
    }
    size(SEARCH, search.len(), places.search_len())?;
    if !mark.is_empty() {
        size(MARK, mark.len(), 1)?;
    }
    let roles = Roles { search, mark: mark.first().copied(), work: circuit.register(WORK) };
    let resets_input = |gate: &&Gate| {
        gate.op() == Op::Reset && (roles.search.contains(&gate.target()) || mark.contains(&gate.target()))
    };
    if let Some(gate) = circuit.gates().iter().find(resets_input) {
        return Err(AuditError::ResetOfInput { qubit: circuit.qubit_name(gate.target()) });
    }
    Ok(roles)
}

/// Whether every gate takes basis states to basis states, up to a phase that is a multiple of pi/4: then running all
/// basis states is a complete audit. A `reset` is one of them as long as it finds the same value on every input, which
/// the audit checks.
pub(crate) fn keeps_basis_states(circuit: &Circuit) -> bool {
    circuit.gates().iter().all(keeps_basis_state)
}

/// [`keeps_basis_states`] of one gate.
pub(crate) fn keeps_basis_state(gate: &Gate) -> bool {
    let op = matches!(gate.op(), Op::X | Op::Reset) || eighths(gate.op()).is_some();
    op && gate.condition().is_none() && (gate.op() != Op::Reset || gate.control_count() == 0)
}

/// The phase of a diagonal gate in multiples of pi/4.
pub(crate) fn eighths(op: Op) -> Option<u8> {
    match op {
        Op::T => Some(1),
        Op::S => Some(2),
        Op::Z => Some(4),
        Op::Sdg => Some(6),
        Op::Tdg => Some(7),
        _ => None,
    }
}

/// Refuses an X whose target is among its controls, which is no gate at all, and circuits beyond [`MAX_GATES`].
pub(crate) fn check_gates(circuit: &Circuit) -> Result<(), AuditError> {
    let own = |gate: &&Gate| {
        gate.op() == Op::X && circuit.controls(gate).iter().any(|control| control.qubit() == gate.target())
    };
    if let Some(gate) = circuit.gates().iter().find(own) {
        let qubit = circuit.qubit_name(gate.target());
        return Err(AuditError::Gate { gate: format!("an X on {qubit} that {qubit} controls") });
    }
    let gates = |block: &Block| block.repeat.saturating_mul(block.gates.len() as u64);
    let all = circuit.blocks().iter().map(gates).fold(0, u64::saturating_add);
    match all <= MAX_GATES {
        true => Ok(()),
        false => Err(AuditError::TooLarge { what: format!("{all} gates, and {MAX_GATES} are the limit") }),
    }
}

/// What a circuit does to one basis state.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Trace {
    /// The qubits at the end.
    pub(crate) qubits: Bits,
    /// The phase in multiples of pi/4, below 8.
    pub(crate) eighths: u8,
    /// What each `reset` found, in order.
    pub(crate) resets: Vec<(QubitId, bool)>,
}

/// Runs a circuit of which [`keeps_basis_states`] holds on one basis state: the search register holds `x`, `mark` holds
/// `y`, and the ancillas are 0.
pub(crate) fn trace(circuit: &Circuit, roles: &Roles, x: &Bits, y: bool) -> Trace {
    let mut qubits = Bits::zeros(circuit.qubit_count());
    roles.search.iter().zip(x.iter()).for_each(|(qubit, value)| qubits.set_at(qubit.index(), value));
    if let Some(mark) = roles.mark {
        qubits.set_at(mark.index(), y);
    }
    let mut trace = Trace { qubits, eighths: 0, resets: Vec::new() };
    for block in circuit.blocks() {
        for _ in 0..block.repeat {
            for gate in &circuit.gates()[block.gates.start as usize..block.gates.end as usize] {
                step(circuit, gate, &mut trace);
            }
        }
    }
    trace
}

fn step(circuit: &Circuit, gate: &Gate, trace: &mut Trace) {
    let target = gate.target().index();
    let value = trace.qubits.at(target);
    let acts =
        circuit.controls(gate).iter().all(|control| trace.qubits.at(control.qubit().index()) != control.is_negated());
    match gate.op() {
        Op::X if acts => trace.qubits.set_at(target, !value),
        Op::Reset => {
            trace.resets.push((gate.target(), value));
            trace.qubits.set_at(target, false);
        }
        op if acts && value => trace.eighths = (trace.eighths + eighths(op).unwrap_or(0)) % 8,
        _ => {}
    }
}

/// The problem's bits for a value of the search register.
pub(crate) fn problem_bits(places: &Places, x: &Bits) -> Bits {
    places.assignment(x)
}

/// The value of the search register for bits of the problem.
pub(crate) fn register_value(places: &Places, bits: &Bits) -> Bits {
    places.searched.iter().map(|&bit| bits.get(bit)).collect()
}
