//! Names and what they mean.
//!
//! There is one space of names. Outside of brackets it is a map; names of blocks, loops, gates and subroutines lie on a
//! stack above it. Inside a gate or a subroutine, only constants, gates and subroutines of the outside are seen.

use rustc_hash::FxHashMap;

use super::constant::Value;
use super::operand::Lanes;
use crate::circuit::qasm::read::ast::{Name, Place};

/// What a register is made of.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Sort {
    Qubit,
    Bit,
}

/// What a name means.
#[derive(Clone, Copy, Debug)]
pub(super) enum Meaning {
    Value(Value),
    Elements(Sort, Lanes),
    /// A gate, by its number among those defined.
    Gate(u32),
    /// A subroutine, by its number.
    Subroutine(u32),
}

impl Meaning {
    /// In words, for messages.
    pub(super) fn words(self) -> &'static str {
        match self {
            Meaning::Value(_) => "a number",
            Meaning::Elements(Sort::Qubit, _) => "a register of qubits",
            Meaning::Elements(Sort::Bit, _) => "a register of bits",
            Meaning::Gate(_) => "a gate",
            Meaning::Subroutine(_) => "a subroutine",
        }
    }
}

/// Names in force.
#[derive(Default)]
pub(super) struct Scope<'a> {
    global: FxHashMap<&'a str, (Meaning, Place)>,
    local: Vec<(&'a str, Meaning, Place)>,
    /// Where the names of the gate or subroutine at hand begin.
    frame: usize,
    /// Where the names of the block at hand begin.
    block: usize,
    /// Whether the text is in version 2.
    pub(super) is_old: bool,
    /// How many gates and subroutines are entered.
    entered: usize,
}

/// What was in force before a block or a frame.
pub(super) struct Before {
    frame: usize,
    block: usize,
    len: usize,
}

impl<'a> Scope<'a> {
    /// What this name means here.
    pub(super) fn get(&self, name: &str) -> Option<Meaning> {
        let local = self.local[self.frame..].iter().rev().find(|(known, ..)| *known == name);
        if let Some((_, meaning, _)) = local {
            return Some(*meaning);
        }
        let (meaning, _) = self.global.get(name)?;
        let hidden = self.entered > 0 && matches!(meaning, Meaning::Elements(..));
        (!hidden).then_some(*meaning)
    }

    /// Where this name was declared in the block at hand.
    pub(super) fn declared(&self, name: &str, inside: bool) -> Option<Place> {
        match inside {
            true => self.local[self.block..].iter().find(|(known, ..)| *known == name).map(|(.., place)| *place),
            false => self.global.get(name).map(|(_, place)| *place),
        }
    }

    /// Gives a name a meaning: in the block at hand, or outside of all brackets.
    pub(super) fn declare(&mut self, name: Name<'a>, meaning: Meaning, inside: bool) {
        match inside {
            true => self.local.push((name.text, meaning, name.place)),
            false => drop(self.global.insert(name.text, (meaning, name.place))),
        }
    }

    /// Begins a block, whose names end with it.
    pub(super) fn enter_block(&mut self) -> Before {
        let before = Before { frame: self.frame, block: self.block, len: self.local.len() };
        self.block = before.len;
        before
    }

    /// Begins a gate or a subroutine, which sees no registers of the outside.
    pub(super) fn enter_frame(&mut self) -> Before {
        let before = self.enter_block();
        self.frame = before.len;
        self.entered += 1;
        before
    }

    /// Ends a block.
    pub(super) fn leave_block(&mut self, before: &Before) {
        self.local.truncate(before.len);
        self.block = before.block;
    }

    /// Ends a gate or a subroutine.
    pub(super) fn leave_frame(&mut self, before: &Before) {
        self.leave_block(before);
        self.frame = before.frame;
        self.entered -= 1;
    }

    /// Whether no gate and no subroutine is entered.
    pub(super) fn is_outside(&self) -> bool {
        self.entered == 0
    }

    /// Names outside of all brackets for which the test holds, by place.
    pub(super) fn global_names(&self, test: impl Fn(&str) -> bool) -> Vec<(&'a str, Place)> {
        let mut found: Vec<_> =
            self.global.iter().filter(|(name, _)| test(name)).map(|(name, (_, place))| (*name, *place)).collect();
        found.sort_by_key(|(_, place)| *place);
        found
    }
}
