//! Every mistake of the language, by the stage that finds it: one function a mistake, which says what is wrong, where,
//! what was expected and how to mend it. A code is never used again for something else.

pub mod lexical;
pub mod names;
pub mod syntax;
pub mod types;
pub mod values;

/// All codes with what they mean, in order. The tests demand a case for each.
pub const CODES: [(&str, &str); 42] = [
    // Characters and words.
    ("T001", "a character that begins no word"),
    ("T002", "a text without its closing quote"),
    ("T003", "letters in a number"),
    ("T004", "a number beyond 64 bits"),
    ("T005", "a sign of another language"),
    // Sentences.
    ("T006", "an unexpected word"),
    ("T007", "text before the first statement"),
    ("T008", "a reserved word as a name"),
    ("T009", "`and` and `or` mixed without brackets"),
    ("T010", "a comparison chain that changes direction"),
    ("T011", "a tuple that does not stand left of `one of` or in its list"),
    ("T012", "a list where a single value is needed"),
    ("T013", "a statement that ends too early"),
    // Names.
    ("T014", "an unknown name"),
    ("T015", "a name declared twice"),
    ("T016", "an index name that hides another name"),
    ("T017", "a second title or objective"),
    ("T018", "a row without its indices, or indices on something that is no row"),
    ("T019", "the wrong number of indices"),
    ("T020", "something other than a kind, a range or a row of constants to run over"),
    ("T021", "the name of a kind where a value is needed"),
    // Types.
    ("T022", "two types that do not go together"),
    ("T023", "a type that the operator does not take"),
    ("T024", "tuples of different lengths"),
    ("T025", "a list that does not fit the indices of its row"),
    // Values.
    ("T026", "a value that must be constant"),
    ("T027", "a divisor that is not a positive constant"),
    ("T028", "a pick from an empty range"),
    ("T029", "the smallest or largest of nothing"),
    ("T030", "an index outside its row"),
    ("T031", "values beyond 64 bits"),
    // Limits.
    ("T032", "nesting too deep"),
    ("T033", "expansion too large"),
    ("T034", "text too long"),
    ("T035", "row too long"),
    // `--set`.
    ("T036", "`--set` of a name that is not declared"),
    ("T037", "`--set` of something that is no `known`"),
    ("T038", "`--set` of one name twice"),
    ("T039", "`--set` with a value that cannot be read"),
    // Warnings.
    ("T040", "a `must` that can never hold"),
    ("T041", "a pick that no constraint mentions"),
    ("T042", "nothing is picked"),
];

/// A fault of this program: a problem was built that breaks its own invariants.
pub(crate) const BROKEN_PROBLEM: crate::diag::Code = crate::diag::Code("T099");
