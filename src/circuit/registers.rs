//! Other people's registers: which qubits of a circuit are the search register, the mark, the work qubits.
//!
//! Input: a circuit, and for each role a selection such as `q[0:4], r[2]`. Output: the same circuit with the qubits in
//! registers `search`, `mark` and `work`, and measured bits in `found`. Qubits without a role become `work`. Gates keep
//! their order and their number; only the numbers of qubits and bits change. Where a router left the search register or
//! the mark on other qubits, swaps at the end bring them home.

use thiserror::Error;

use crate::circuit::{Circuit, Condition, Control, FOUND, Gate, MARK, MeasuredId, Op, QubitId, Register, SEARCH, WORK};
use crate::id::Id;

/// A selection for each role; without one, the role has the register of its name, if there is one.
///
/// A selection is a list of `name`, `name[3]`, `name[0:4]` or `name[0:2:8]` (start, step, stop) joined by commas. As in
/// OpenQASM, both ends of a range belong to it.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Roles {
    /// The qubits that are searched, in order.
    pub search: Option<String>,
    /// The qubit that a bit oracle writes.
    pub mark: Option<String>,
    /// The clean ancillas; without a selection, all other qubits.
    pub work: Option<String>,
    /// The measured bits that hold the result, in order.
    pub found: Option<String>,
    /// Where the searched qubits are at the end, in the same order, if a router moved them.
    pub search_after: Option<String>,
    /// Where the mark is at the end, if a router moved it.
    pub mark_after: Option<String>,
}

impl Roles {
    /// Whether nothing is selected.
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }
}

/// A selection that does not fit the circuit.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum RegistersError {
    /// The selection is not written as one.
    #[error("`{0}` is not a selection of qubits such as `q[0:4]`")]
    Syntax(String),
    /// There is no register of this name.
    #[error("the circuit has no register `{0}`")]
    Unknown(String),
    /// An index outside of its register.
    #[error("`{0}` reaches outside of its register")]
    Outside(String),
    /// A qubit or bit that is selected twice.
    #[error("{0} is selected twice")]
    Twice(String),
    /// Another number of qubits at the end than at the beginning.
    #[error("`{selection}` selects {found} qubits, and {expected} were given for the beginning")]
    OtherNumber {
        /// The selection for the end.
        selection: String,
        /// How many it selects.
        found: usize,
        /// How many there are.
        expected: usize,
    },
    /// A qubit that has no role.
    #[error("{0} is neither searched nor the mark nor a work qubit")]
    NoRole(String),
}

/// The circuit with its qubits in the registers of their roles.
pub fn assign(circuit: &Circuit, roles: &Roles) -> Result<Circuit, RegistersError> {
    let named = |name: &str| circuit.qubits.iter().any(|register| register.name == name).then(|| name.to_owned());
    let search = roles.search.clone().or_else(|| named(SEARCH));
    let mut qubits = Groups::new(&circuit.qubits);
    if let Some(selection) = search {
        qubits.group(SEARCH, &selection)?;
    }
    match &roles.mark {
        Some(selection) => qubits.group(MARK, selection)?,
        // A register called `mark` is the mark unless it was selected for something else.
        None => named(MARK).map_or(Ok(()), |mark| qubits.group_if_free(MARK, &mark))?,
    }
    if let Some(selection) = &roles.work {
        qubits.group(WORK, selection)?;
        if let Some(at) = qubits.first_free() {
            return Err(RegistersError::NoRole(circuit.qubit_name(QubitId::new(at))));
        }
    }
    qubits.group_rest(WORK);
    let mut measured = Groups::new(&circuit.measured);
    if let Some(selection) = &roles.found {
        measured.group(FOUND, selection)?;
    }
    measured.keep_rest();
    let mut moves = qubits.moves(SEARCH, roles.search_after.as_deref())?;
    moves.extend(qubits.moves(MARK, roles.mark_after.as_deref())?);
    let is_twice = |&(at, &(_, place)): &(usize, &(u32, u32))| moves[..at].iter().any(|&(_, before)| before == place);
    if let Some((_, &(_, twice))) = moves.iter().enumerate().find(is_twice) {
        let old = qubits.places.iter().position(|&place| place == twice).expect("a qubit of the circuit");
        return Err(RegistersError::Twice(circuit.qubit_name(QubitId::new(old))));
    }
    let mut assigned = renumbered(circuit, &qubits, &measured);
    move_back(&mut assigned, moves);
    Ok(assigned)
}

/// Appends swaps that bring to each first place what is at the second one.
fn move_back(circuit: &mut Circuit, mut moves: Vec<(u32, u32)>) {
    for at in 0..moves.len() {
        let (home, place) = moves[at];
        if home == place {
            continue;
        }
        let [a, b] = [home, place].map(|place| QubitId::new(place as usize));
        for (control, target) in [(a, b), (b, a), (a, b)] {
            circuit.push(Op::X, &[Control::on(control)], target);
        }
        // What was at home is now where the other came from.
        moves[at + 1..].iter_mut().filter(|other| other.1 == home).for_each(|other| other.1 = place);
    }
}

fn renumbered(circuit: &Circuit, qubits: &Groups<'_>, measured: &Groups<'_>) -> Circuit {
    let qubit = |old: QubitId| QubitId::new(qubits.places[old.index()] as usize);
    let bit = |old: MeasuredId| MeasuredId::new(measured.places[old.index()] as usize);
    let gate = |gate: &Gate| Gate {
        target: qubit(gate.target),
        condition: gate.condition.map(|condition| Condition::new(bit(condition.bit()), condition.value())),
        argument: match gate.op {
            Op::Measure => measured.places[gate.argument as usize],
            _ => gate.argument,
        },
        ..*gate
    };
    let control = |control: &Control| Control::new(qubit(control.qubit()), !control.is_negated());
    Circuit {
        qubits: qubits.made.clone(),
        measured: measured.made.clone(),
        gates: circuit.gates.iter().map(gate).collect(),
        controls: circuit.controls.iter().map(control).collect(),
        ..circuit.clone()
    }
}

/// Marks an element that has no new place yet.
const FREE: u32 = u32::MAX;

/// Registers in the making.
struct Groups<'c> {
    old: &'c [Register],
    /// The new place of each old element.
    places: Vec<u32>,
    made: Vec<Register>,
    next: u32,
}

impl<'c> Groups<'c> {
    fn new(old: &'c [Register]) -> Self {
        let count = old.last().map_or(0, |last| last.start + last.len);
        Self { old, places: vec![FREE; count as usize], made: Vec::new(), next: 0 }
    }

    fn group(&mut self, name: &str, selection: &str) -> Result<(), RegistersError> {
        let elements = select(self.old, selection)?;
        self.add(name, &elements)
    }

    fn group_if_free(&mut self, name: &str, selection: &str) -> Result<(), RegistersError> {
        let elements = select(self.old, selection)?;
        if elements.iter().all(|&at| self.places[at as usize] == FREE) { self.add(name, &elements) } else { Ok(()) }
    }

    fn add(&mut self, name: &str, elements: &[u32]) -> Result<(), RegistersError> {
        let start = self.next;
        for &at in elements {
            let place = &mut self.places[at as usize];
            if *place != FREE {
                return Err(RegistersError::Twice(super::element_name(self.old, at as usize)));
            }
            *place = self.next;
            self.next += 1;
        }
        if self.next > start {
            self.made.push(Register { name: name.to_owned(), start, len: self.next - start });
        }
        Ok(())
    }

    /// For each element of a register made here: its place, and that of what is selected in its stead, if anything is.
    fn moves(&self, name: &str, selection: Option<&str>) -> Result<Vec<(u32, u32)>, RegistersError> {
        let made = self.made.iter().find(|register| register.name == name);
        let homes = made.map_or(0..0, |register| register.start..register.start + register.len);
        let Some(selection) = selection else { return Ok(homes.map(|home| (home, home)).collect()) };
        let after = select(self.old, selection)?;
        if after.len() != homes.len() {
            let selection = selection.to_owned();
            return Err(RegistersError::OtherNumber { selection, found: after.len(), expected: homes.len() });
        }
        Ok(homes.zip(after.into_iter().map(|at| self.places[at as usize])).collect())
    }

    fn first_free(&self) -> Option<usize> {
        self.places.iter().position(|&place| place == FREE)
    }

    fn group_rest(&mut self, name: &str) {
        let rest: Vec<u32> = (0..self.places.len() as u32).filter(|&at| self.places[at as usize] == FREE).collect();
        self.add(name, &rest).expect("each free element once");
    }

    /// What is left stays in the registers it was in.
    fn keep_rest(&mut self) {
        for register in self.old {
            let elements = register.start..register.start + register.len;
            let rest: Vec<u32> = elements.filter(|&at| self.places[at as usize] == FREE).collect();
            self.add(&register.name, &rest).expect("each free element once");
        }
    }
}

/// The elements of a selection.
fn select(registers: &[Register], selection: &str) -> Result<Vec<u32>, RegistersError> {
    let mut elements = Vec::new();
    for piece in selection.split(',').map(str::trim) {
        let syntax = || RegistersError::Syntax(piece.to_owned());
        let (name, index) = match piece.split_once('[') {
            Some((name, rest)) => (name.trim(), Some(rest.strip_suffix(']').ok_or_else(syntax)?)),
            None => (piece, None),
        };
        if name.is_empty() {
            return Err(syntax());
        }
        let register = registers.iter().find(|register| register.name == name);
        let register = register.ok_or_else(|| RegistersError::Unknown(name.to_owned()))?;
        let (start, step, stop) = match index {
            None => (0, 1, register.len - 1),
            Some(index) => range(index).ok_or_else(syntax)?,
        };
        if start.max(stop) >= register.len {
            return Err(RegistersError::Outside(piece.to_owned()));
        }
        elements.extend((start..=stop).step_by(step as usize).map(|at| register.start + at));
    }
    Ok(elements)
}

/// `3`, `0:4` or `0:2:8`: start, step, stop.
fn range(text: &str) -> Option<(u32, u32, u32)> {
    let numbers: Vec<u32> = text.split(':').map(|part| part.trim().parse().ok()).collect::<Option<_>>()?;
    match numbers[..] {
        [at] => Some((at, 1, at)),
        [start, stop] => Some((start, 1, stop)),
        [start, step, stop] if step > 0 => Some((start, step, stop)),
        _ => None,
    }
    .filter(|&(start, _, stop)| start <= stop)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Registers a[2] and q[4], measured bits c[3].
    fn sample() -> Circuit {
        let mut circuit = Circuit::new();
        let a = circuit.add_qubits("a", 2);
        let q = circuit.add_qubits("q", 4);
        let c = circuit.add_measured("c", 3);
        circuit.push(Op::X, &[Control::on(a[0]), !Control::on(q[3])], q[1]);
        circuit.push_measure(None, q[3], c[2]);
        circuit.push_if(Some(Condition::new(c[2], true)), Op::Z, &[], a[1]);
        circuit
    }

    fn roles(search: &str, mark: &str, work: &str, found: &str) -> Roles {
        let some = |text: &str| (!text.is_empty()).then(|| text.to_owned());
        Roles { search: some(search), mark: some(mark), work: some(work), found: some(found), ..Roles::default() }
    }

    #[test]
    fn qubits_go_to_the_registers_of_their_roles() {
        let circuit = assign(&sample(), &roles("q[1:3]", "a[0]", "", "c[1:2]")).unwrap();
        let words = |registers: &[Register]| {
            registers.iter().map(|register| (register.name.clone(), register.len)).collect::<Vec<_>>()
        };
        let expected = [("search", 3), ("mark", 1), ("work", 2)].map(|(name, len)| (name.to_owned(), len));
        assert_eq!(words(&circuit.qubits), expected);
        assert_eq!(words(&circuit.measured), [("found".to_owned(), 2), ("c".to_owned(), 1)]);
        let (search, mark, work) = (circuit.register(SEARCH), circuit.register(MARK), circuit.register(WORK));
        let gates = circuit.gates();
        assert_eq!(gates[0].target(), search[0]);
        assert_eq!(circuit.controls(&gates[0]), [Control::on(mark[0]), !Control::on(search[2])]);
        assert_eq!((gates[1].target(), gates[1].measured()), (search[2], Some(MeasuredId::new(1))));
        assert_eq!(gates[2].condition(), Some(Condition::new(MeasuredId::new(1), true)));
        // The other qubits in their order: a[1], q[0].
        assert_eq!(gates[2].target(), work[0]);
    }

    #[test]
    fn selections_have_an_order_and_steps() {
        let circuit = assign(&sample(), &roles("q[2], q[0], a", "", "", "")).unwrap();
        assert_eq!(circuit.register(SEARCH).len(), 4);
        // q[1] and q[3] are left.
        assert_eq!(circuit.gates()[0].target(), circuit.register(WORK)[0]);
        assert_eq!(select(&sample().qubits, "q[0:2:3]"), Ok(vec![2, 4]));
        assert_eq!(select(&sample().qubits, "q[ 1 : 2 ],a[1]"), Ok(vec![3, 4, 1]));
    }

    #[test]
    fn what_does_not_fit_is_refused() {
        let refused = |search: &str, work: &str| assign(&sample(), &roles(search, "", work, "")).unwrap_err();
        assert_eq!(refused("q[0:4]", ""), RegistersError::Outside("q[0:4]".to_owned()));
        assert_eq!(refused("r", ""), RegistersError::Unknown("r".to_owned()));
        assert_eq!(refused("q[2:1]", ""), RegistersError::Syntax("q[2:1]".to_owned()));
        assert_eq!(refused("q[0:0:1]", ""), RegistersError::Syntax("q[0:0:1]".to_owned()));
        assert_eq!(refused("q[1", ""), RegistersError::Syntax("q[1".to_owned()));
        assert_eq!(refused("q,", ""), RegistersError::Syntax(String::new()));
        assert_eq!(refused("q[0:1],q[1]", ""), RegistersError::Twice("q[1]".to_owned()));
        assert_eq!(refused("q", "a[0]"), RegistersError::NoRole("a[1]".to_owned()));
    }
}
