//! The limits of the language, each with an error of its own: a short text may ask for an endless expansion, and no
//! text may bring the program down.

/// The longest text that is read, in bytes. Spans are 32 bits; nobody writes 16 MiB of puzzle by hand.
pub const MAX_TEXT: usize = 16 << 20;

/// The deepest nesting of expressions. The walks over the syntax tree are recursive; at this depth they use a small
/// part of a thread's stack, and no reader follows so many brackets.
pub const MAX_NESTING: u32 = 128;

/// The most elements in one row, and the most variables in a problem.
pub const MAX_ROW: usize = 1 << 20;

/// The most steps of expansion: one for every expression looked at, every loop turn and every operand stored.
pub const MAX_STEPS: u64 = 10_000_000;

/// The most messages of one run: after these, more do not help.
pub const MAX_MESSAGES: usize = 100;
