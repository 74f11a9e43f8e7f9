//! The values of constant expressions.

use rustc_hash::FxHashMap;

use crate::circuit::qasm::read::ast::{Ast, Expr, Span, Step};
use crate::circuit::qasm::read::fault::Fault;

/// A constant.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) enum Value {
    Whole(i64),
    Real(f64),
}

impl Value {
    fn real(self) -> f64 {
        match self {
            Value::Whole(value) => value as f64,
            Value::Real(value) => value,
        }
    }
}

/// Integers known by name: the variables of the loops around.
pub(super) type Variables<'a> = FxHashMap<&'a str, i64>;

/// An integer expression.
pub(super) fn whole(ast: &Ast<'_>, variables: &Variables<'_>, expr: Expr) -> Result<i64, Fault> {
    match value(ast, variables, expr)? {
        Value::Whole(value) => Ok(value),
        Value::Real(_) => Err(Fault::NotWhole),
    }
}

/// An angle in radians.
pub(super) fn angle(ast: &Ast<'_>, variables: &Variables<'_>, expr: Expr) -> Result<f64, Fault> {
    let angle = value(ast, variables, expr)?.real();
    if angle.is_finite() { Ok(angle) } else { Err(Fault::NotFinite) }
}

/// The ends and the step of a span: start, step, stop.
pub(super) fn span(ast: &Ast<'_>, variables: &Variables<'_>, span: Span) -> Result<(i64, i64, i64), Fault> {
    let start = whole(ast, variables, span.start)?;
    let step = span.step.map_or(Ok(1), |step| whole(ast, variables, step))?;
    let stop = whole(ast, variables, span.stop)?;
    if step == 0 { Err(Fault::ZeroStep) } else { Ok((start, step, stop)) }
}

/// How many integers there are from `start` to `stop` in steps of `step`, both ends included.
pub(super) fn count(start: i64, step: i64, stop: i64) -> Result<u64, Fault> {
    if stop != start && (stop > start) != (step > 0) {
        return Ok(0);
    }
    let distance = (i128::from(stop) - i128::from(start)).unsigned_abs();
    let count = distance / i128::from(step).unsigned_abs() + 1;
    i64::try_from(count).map(|count| count as u64).map_err(|_| Fault::NumberTooLarge)
}

fn value(ast: &Ast<'_>, variables: &Variables<'_>, expr: Expr) -> Result<Value, Fault> {
    let steps = &ast.steps[expr.start as usize..expr.end as usize];
    if let [Step::Whole(value)] = steps {
        return Ok(Value::Whole(*value));
    }
    let mut stack: Vec<Value> = Vec::new();
    for &step in steps {
        let result = match step {
            Step::Whole(value) => Value::Whole(value),
            Step::Real(value) => Value::Real(value),
            Step::Name(name) => named(variables, name)?,
            Step::Negate => negate(pop(&mut stack))?,
            Step::Add | Step::Subtract | Step::Multiply | Step::Divide => {
                let b = pop(&mut stack);
                let a = pop(&mut stack);
                combine(step, a, b)?
            }
        };
        stack.push(result);
    }
    Ok(pop(&mut stack))
}

fn pop(stack: &mut Vec<Value>) -> Value {
    stack.pop().expect("postfix order: operands come before their operator")
}

fn named(variables: &Variables<'_>, name: &str) -> Result<Value, Fault> {
    match name {
        "pi" | "π" => Ok(Value::Real(std::f64::consts::PI)),
        "tau" | "τ" => Ok(Value::Real(std::f64::consts::TAU)),
        "euler" | "ℇ" => Ok(Value::Real(std::f64::consts::E)),
        _ => variables.get(name).map(|&value| Value::Whole(value)).ok_or_else(|| Fault::Undeclared(name.to_owned())),
    }
}

fn negate(a: Value) -> Result<Value, Fault> {
    match a {
        Value::Whole(a) => a.checked_neg().map(Value::Whole).ok_or(Fault::NumberTooLarge),
        Value::Real(a) => Ok(Value::Real(-a)),
    }
}

fn combine(step: Step<'_>, a: Value, b: Value) -> Result<Value, Fault> {
    if let (Value::Whole(a), Value::Whole(b)) = (a, b) {
        let result = match step {
            Step::Add => a.checked_add(b),
            Step::Subtract => a.checked_sub(b),
            Step::Multiply => a.checked_mul(b),
            _ if b == 0 => return Err(Fault::DivisionByZero),
            _ if a.checked_rem(b).is_some_and(|rest| rest != 0) => return Err(Fault::Quotient),
            _ => a.checked_div(b),
        };
        return result.map(Value::Whole).ok_or(Fault::NumberTooLarge);
    }
    let (a, b) = (a.real(), b.real());
    Ok(Value::Real(match step {
        Step::Add => a + b,
        Step::Subtract => a - b,
        Step::Multiply => a * b,
        _ if b == 0.0 => return Err(Fault::DivisionByZero),
        _ => a / b,
    }))
}
