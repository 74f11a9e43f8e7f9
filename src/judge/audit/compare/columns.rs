//! What a circuit does to labelled basis states, for one string of measurement outcomes: the columns of its operator.
//!
//! Input: a circuit and basis states of its inputs. Output: for each of them the basis states at the end, over the
//! inputs and with the work qubits, with exact amplitudes that share one unknown factor.

use crate::budget::Budget;
use crate::circuit::{Circuit, QubitId};
use crate::judge::audit::state::amplitude::Exact;
use crate::judge::audit::superposition::run::{Draw, End, Run};
use crate::judge::audit::{AuditError, Options};
use crate::problem::Bits;

/// The basis states that one input becomes: the inputs at the end, whether work is clean, the amplitude.
pub(in crate::judge::audit) type Column = Vec<(Bits, bool, Exact)>;

/// One string of outcomes followed to its end.
pub(in crate::judge::audit) struct Columns {
    /// One for each input.
    pub(in crate::judge::audit) columns: Vec<Column>,
    /// How many outcomes were free.
    pub(in crate::judge::audit) free: usize,
}

/// Follows a circuit; `Err` holds how a run ended that did not reach the end of the circuit.
pub(in crate::judge::audit) fn columns(
    circuit: &Circuit,
    inputs: &[QubitId],
    starts: &[Bits],
    draw: Draw,
    budget: &Budget,
) -> Result<Result<Columns, End>, AuditError> {
    let options = Options::default();
    let mut run = Run::new(circuit, starts, draw, &options, budget);
    match run.follow()? {
        End::Reached => {}
        end => return Ok(Err(end)),
    }
    let is_input = |qubit: usize| inputs.iter().any(|input| crate::id::Id::index(*input) == qubit);
    let rest: Vec<usize> = (0..circuit.qubit_count()).filter(|&qubit| !is_input(qubit)).collect();
    let column = |label: usize| {
        let entries = run.state().entries(label).map(|entry| {
            let value: Bits = inputs.iter().map(|&qubit| entry.qubit(qubit)).collect();
            let is_clean = !rest.iter().any(|&qubit| entry.qubit(crate::id::Id::new(qubit)));
            (value, is_clean, entry.amplitude)
        });
        let mut column: Column = entries.filter(|(.., amplitude)| amplitude.0 != [0; 4]).collect();
        column.sort_by(|a, b| (&a.0, a.1).cmp(&(&b.0, b.1)));
        column
    };
    let columns = (0..starts.len()).map(column).collect();
    Ok(Ok(Columns { columns, free: run.free() }))
}

/// The value of all qubits where the inputs have these values and the others are 0.
pub(in crate::judge::audit) fn start(circuit: &Circuit, inputs: &[QubitId], value: &Bits) -> Bits {
    let mut state = Bits::zeros(circuit.qubit_count());
    inputs.iter().zip(value.iter()).for_each(|(&qubit, bit)| state.set_at(crate::id::Id::index(qubit), bit));
    state
}

/// A product of exact amplitudes, in wide integers.
pub(in crate::judge::audit) fn product(a: Exact, b: Exact) -> [i128; 4] {
    let mut sum = [0i128; 4];
    for (i, &x) in a.0.iter().enumerate() {
        for (j, &y) in b.0.iter().enumerate() {
            // w^4 = -1. Coefficients are below 2^62, so four products fit.
            let term = i128::from(x) * i128::from(y);
            if i + j < 4 { sum[i + j] += term } else { sum[i + j - 4] -= term }
        }
    }
    sum
}
