//! The low columns of a truth table: the values of its first six inputs, as words of 64 rows.

/// For each of the low six bits of a number, the word whose bit `j` is that bit of `j`.
pub const COLUMNS: [u64; 6] = [
    0xaaaa_aaaa_aaaa_aaaa,
    0xcccc_cccc_cccc_cccc,
    0xf0f0_f0f0_f0f0_f0f0,
    0xff00_ff00_ff00_ff00,
    0xffff_0000_ffff_0000,
    0xffff_ffff_0000_0000,
];

/// Column `at` of the 64 rows of word `word`: above the low six bits it is constant.
pub fn column(at: usize, word: usize) -> u64 {
    COLUMNS.get(at).copied().unwrap_or_else(|| if word >> (at - COLUMNS.len()) & 1 == 1 { u64::MAX } else { 0 })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_column_is_a_bit_of_the_number_of_the_row() {
        for (at, row) in (0..9).flat_map(|at| (0..512).map(move |row| (at, row))) {
            assert_eq!(column(at, row / 64) >> (row % 64) & 1, (row >> at & 1) as u64, "bit {at} of {row}");
        }
    }
}
