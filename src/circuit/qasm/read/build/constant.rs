//! The values of constant expressions.

use super::scope::{Meaning, Scope};
use crate::circuit::qasm::read::ast::{Ast, Expr, Span, Step, Type};
use crate::circuit::qasm::read::fault::Fault;

/// A constant.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) enum Value {
    Whole(i64),
    Real(f64),
}

impl Value {
    pub(super) fn real(self) -> f64 {
        match self {
            Value::Whole(value) => value as f64,
            Value::Real(value) => value,
        }
    }
}

/// An integer expression.
pub(super) fn whole(ast: &Ast<'_>, scope: &Scope<'_>, expr: Expr) -> Result<i64, Fault> {
    match value(ast, scope, expr)? {
        Value::Whole(value) => Ok(value),
        Value::Real(_) => Err(Fault::NotWhole),
    }
}

/// An angle in radians.
pub(super) fn angle(ast: &Ast<'_>, scope: &Scope<'_>, expr: Expr) -> Result<f64, Fault> {
    finite(value(ast, scope, expr)?.real())
}

fn finite(number: f64) -> Result<f64, Fault> {
    if number.is_finite() { Ok(number) } else { Err(Fault::NotFinite) }
}

/// The ends and the step of a span: start, step, stop.
pub(super) fn span(ast: &Ast<'_>, scope: &Scope<'_>, span: Span) -> Result<(i64, i64, i64), Fault> {
    let start = whole(ast, scope, span.start)?;
    let step = span.step.map_or(Ok(1), |step| whole(ast, scope, step))?;
    let stop = whole(ast, scope, span.stop)?;
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

/// The value as a constant of this type with this size in bits. What the type cannot hold exactly is refused.
pub(super) fn cast(value: Value, kind: Type, size: Option<i64>) -> Result<Value, Fault> {
    let size = match size {
        None => None,
        Some(size) => Some(u32::try_from(size).ok().filter(|&size| size > 0).ok_or(Fault::Size(size.to_string()))?),
    };
    let holds = |value: i64| match (kind, size) {
        (Type::Uint, _) if value < 0 => false,
        (_, None) => true,
        (Type::Uint, Some(size)) => size >= 63 || value >> size == 0,
        (_, Some(size)) => size >= 64 || matches!(value >> (size - 1), 0 | -1),
    };
    match (kind, value) {
        (Type::Int | Type::Uint, Value::Whole(whole)) if holds(whole) => Ok(value),
        (Type::Int | Type::Uint, Value::Whole(_)) => Err(Fault::Misfit),
        (Type::Int | Type::Uint, Value::Real(_)) => Err(Fault::NotWhole),
        (Type::Float, value) => match (value.real(), size) {
            (real, Some(32)) if f64::from(real as f32) != real => Err(Fault::Misfit),
            (real, None | Some(32 | 64)) => finite(real).map(Value::Real),
            (_, Some(size)) => Err(Fault::Size(size.to_string())),
        },
        (Type::Angle, value) => {
            let real = finite(value.real())?;
            let turns = size.map_or(0.0, |size| real / std::f64::consts::TAU * f64::from(size.min(1000)).exp2());
            let near = (turns - turns.round()).abs() <= 4.0 * f64::EPSILON * turns.abs();
            if near { Ok(Value::Real(real)) } else { Err(Fault::Misfit) }
        }
    }
}

/// Whether every name of the expression is that of a value.
pub(super) fn check_names(ast: &Ast<'_>, scope: &Scope<'_>, expr: Expr) -> Result<(), Fault> {
    steps(ast, expr).iter().try_for_each(|&step| match step {
        Step::Name(name) => named(scope, name).map(|_| ()),
        Step::Element(at) => Err(Fault::NotConstant(ast.elements[at as usize].name.to_owned())),
        Step::Apply(name, count) => known_function(name, count),
        Step::Caret if !scope.is_old => Err(Fault::Caret),
        _ => Ok(()),
    })
}

fn steps<'s, 'a>(ast: &'s Ast<'a>, expr: Expr) -> &'s [Step<'a>] {
    &ast.steps[expr.start as usize..expr.end as usize]
}

/// The value of an expression.
pub(super) fn value(ast: &Ast<'_>, scope: &Scope<'_>, expr: Expr) -> Result<Value, Fault> {
    let steps = steps(ast, expr);
    if let [Step::Whole(value)] = steps {
        return Ok(Value::Whole(*value));
    }
    let mut stack: Vec<Value> = Vec::new();
    for &step in steps {
        let result = match step {
            Step::Whole(value) => Value::Whole(value),
            Step::Real(value) => Value::Real(value),
            Step::Name(name) => named(scope, name)?,
            Step::Element(at) => return Err(Fault::NotConstant(ast.elements[at as usize].name.to_owned())),
            Step::Negate => negate(pop(&mut stack))?,
            Step::Apply(name, count) => {
                known_function(name, count)?;
                let second = (count == 2).then(|| pop(&mut stack));
                let first = pop(&mut stack);
                apply(name, first, second, scope.is_old)?
            }
            Step::Caret if !scope.is_old => return Err(Fault::Caret),
            _ => {
                let b = pop(&mut stack);
                let a = pop(&mut stack);
                combine(step, a, b, scope.is_old)?
            }
        };
        stack.push(result);
    }
    Ok(pop(&mut stack))
}

fn pop(stack: &mut Vec<Value>) -> Value {
    stack.pop().expect("postfix order: operands come before their operator")
}

fn named(scope: &Scope<'_>, name: &str) -> Result<Value, Fault> {
    match scope.get(name) {
        Some(Meaning::Value(value)) => return Ok(value),
        Some(_) => return Err(Fault::NotConstant(name.to_owned())),
        None => {}
    }
    match name {
        "pi" | "π" => Ok(Value::Real(std::f64::consts::PI)),
        "tau" | "τ" if !scope.is_old => Ok(Value::Real(std::f64::consts::TAU)),
        "euler" | "ℇ" if !scope.is_old => Ok(Value::Real(std::f64::consts::E)),
        _ => Err(Fault::Undeclared(name.to_owned())),
    }
}

fn negate(a: Value) -> Result<Value, Fault> {
    match a {
        Value::Whole(a) => a.checked_neg().map(Value::Whole).ok_or(Fault::NumberTooLarge),
        Value::Real(a) => Ok(Value::Real(-a)),
    }
}

/// Whether there is a function of this name with so many arguments.
fn known_function(name: &str, count: u32) -> Result<(), Fault> {
    let wanted = match name {
        "sin" | "cos" | "tan" | "exp" | "ln" | "log" | "sqrt" | "arcsin" | "arccos" | "arctan" => 1,
        "pow" | "mod" => 2,
        _ => return Err(Fault::UnknownFunction(name.to_owned())),
    };
    if count == wanted { Ok(()) } else { Err(Fault::FunctionArguments(name.to_owned())) }
}

fn apply(name: &str, first: Value, second: Option<Value>, is_old: bool) -> Result<Value, Fault> {
    if let Some(second) = second {
        return combine(if name == "pow" { Step::Power } else { Step::Remainder }, first, second, is_old);
    }
    let x = first.real();
    let result = match name {
        "sin" => x.sin(),
        "cos" => x.cos(),
        "tan" => x.tan(),
        "exp" => x.exp(),
        "ln" | "log" => x.ln(),
        "sqrt" => x.sqrt(),
        "arcsin" => x.asin(),
        "arccos" => x.acos(),
        _ => x.atan(),
    };
    finite(result).map(Value::Real)
}

/// An operator of two values. In version 2 all numbers are real.
fn combine(step: Step<'_>, a: Value, b: Value, is_old: bool) -> Result<Value, Fault> {
    if let (Value::Whole(a), Value::Whole(b)) = (a, b) {
        let divides = || a.checked_rem(b).is_none_or(|rest| rest == 0);
        let result = match step {
            Step::Add => a.checked_add(b),
            Step::Subtract => a.checked_sub(b),
            Step::Multiply => a.checked_mul(b),
            Step::Power | Step::Caret if b < 0 => return real(step, a as f64, b as f64),
            Step::Power | Step::Caret => u32::try_from(b).ok().and_then(|b| a.checked_pow(b)),
            _ if b == 0 => return Err(Fault::DivisionByZero),
            Step::Remainder => a.checked_rem(b),
            _ if divides() => a.checked_div(b),
            _ if is_old => return real(step, a as f64, b as f64),
            _ => return Err(Fault::Quotient),
        };
        return result.map(Value::Whole).ok_or(Fault::NumberTooLarge);
    }
    real(step, a.real(), b.real())
}

fn real(step: Step<'_>, a: f64, b: f64) -> Result<Value, Fault> {
    let result = match step {
        Step::Add => a + b,
        Step::Subtract => a - b,
        Step::Multiply => a * b,
        Step::Power | Step::Caret => a.powf(b),
        _ if b == 0.0 => return Err(Fault::DivisionByZero),
        Step::Remainder => a % b,
        _ => a / b,
    };
    Ok(Value::Real(result))
}
