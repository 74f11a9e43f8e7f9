"""Tests of the reference reader: published counts, six puzzles written from their words, and refused texts.

The puzzles stand here as strings on purpose: they were written from the puzzles' words by another hand than
`problems/*.tally`, and a different reading of the words shows as a different count.
"""

import unittest

import tally_meaning
import tally_reference
from tally_syntax import TallyError


def count(text, **settings):
    """The number of solutions of a text."""
    return tally_reference.count(tally_meaning.read(text, settings))


BUOY = """
title "Instrument payload of an ocean buoy"
kind Tool = thermo | salin | profiler | wave | wind | baro | hydro | oxy | nitrate | camera | modem
known weight[t in Tool] = [4, 3, 9, 5, 3, 1, 4, 2, 7, 5, 3]
known power[t in Tool]  = [2, 2, 8, 4, 2, 1, 5, 3, 6, 7, 4]
known worth[t in Tool]  = [3, 4, 8, 6, 3, 2, 5, 4, 7, 4, 1]
pick has[t in Tool]
pick packs in 1 to 4
must sum [weight[t] * has[t] for t in Tool] + 2 * packs <= 31
must sum [power[t] * has[t] for t in Tool] <= 6 * packs
must not (has[hydro] and has[profiler])
must has[nitrate] needs has[oxy]
must has[oxy] needs has[thermo] and has[salin]
must has[camera] or has[hydro] needs has[modem]
must has[wind] = has[baro]
must at least 5 of [has[t] for t in Tool]
must exactly 1 of [has[wave], has[camera]]
most sum [worth[t] * has[t] for t in Tool]
"""

CHOIR = """
pick sop[i in 1 to 2] in 1 to 7
pick alt[i in 1 to 2] in 1 to 7
pick ten in 1 to 7
pick bas[i in 1 to 2] in 1 to 7
must different [sop[1], sop[2], alt[1], alt[2], ten, bas[1], bas[2]]
must abs(sop[1] - sop[2]) = 1
must abs(bas[1] - bas[2]) != 1
must smallest [alt[1], alt[2]] < ten < largest [alt[1], alt[2]]
must sop[1] <= 3
must some of [bas[i] = 7 for i in 1 to 2] needs ten mod 2 = 0
must bas[1] + alt[1] >= 8
"""

GREENHOUSE = """
kind Crop = tomato | basil | lettuce | fern
known water[c in Crop] = [4, 2, 3, 1]
pick bench[r in 0 to 2, c in 0 to 2] in Crop
must all of [(bench[r, c], bench[r + dr, c + 1 - dr]) one of
      [(tomato, basil), (basil, tomato), (tomato, fern), (fern, tomato), (basil, basil), (basil, lettuce),
       (lettuce, basil), (lettuce, lettuce), (lettuce, fern), (fern, lettuce), (fern, fern)]
    for r in 0 to 2, c in 0 to 2, dr in 0 to 1 with r + dr <= 2 and c + 1 - dr <= 2]
must at least 2 of [bench[r, c] = tomato for r in 0 to 2, c in 0 to 2]
must number of [bench[r, c] = lettuce for r in 0 to 2, c in 0 to 2] >= 2
must at most 3 of [bench[r, c] = fern for r in 0 to 2, c in 0 to 2]
must bench[1, 1] != tomato
must sum [water[bench[r, c]] for r in 0 to 2, c in 0 to 2] <= 23
"""

BAKERY = """
kind Batch = rye | rolls | cake | tart | pizza | buns
known slots[b in Batch] = [4, 2, 3, 2, 1, 2]
pick start[b in Batch] in 0 to 7
pick oven[b in Batch] in 0 to 1
let end[b in Batch] = start[b] + slots[b]
must all of [oven[a] = oven[b] needs end[a] <= start[b] or end[b] <= start[a] for a in Batch, b in Batch with a != b]
must oven[rye] = 0
must start[tart] >= end[cake]
must oven[rolls] != oven[buns]
must not start[pizza] < 2
must largest [end[b] for b in Batch] <= 8
least largest [end[b] for b in Batch]
"""

ROSTER = """
kind Crew = A | B | C | D | E
known days = 8
pick works[c in Crew, d in 1 to days]
must all of [exactly 2 of [works[c, d] for c in Crew] for d in 1 to days]
must all of [at most 2 of [works[c, e] for e in d to d + 2] for c in Crew, d in 1 to days - 2]
must none of [works[A, d] and works[B, d] for d in 1 to days]
must all of [works[D, d] needs not works[E, d + 1] for d in 1 to days - 1]
must all of [3 <= number of [works[c, d] for d in 1 to days] <= 4 for c in Crew]
must works[C, 1] or works[C, days]
must works[E, 4]
must some of [works[c, 5] != works[c, 6] for c in Crew]
"""

VALVES = """
known left  = [1, 2, 4, 5, 7, 8, 1, 4, 2, 5, 3, 6, 1, 3]
known right = [2, 3, 5, 6, 8, 9, 4, 7, 5, 8, 6, 9, 9, 7]
pick open[v in 1 to 14]
must all of [odd [open[v] for v in 1 to 14 with left[v] = j or right[v] = j] for j in 1 to 9]
must at least 5 of [open[v] for v in 1 to 14]
"""

QUEENS = """
known n = 6
pick q[i in 1 to n] in 1 to n
must different [q[i] for i in 1 to n]
must different [q[i] + i for i in 1 to n]
must different [q[i] - i for i in 1 to n]
"""


class Puzzles(unittest.TestCase):
    """The six puzzles; counts from puzzles.json, found there by backtracking and by a separate model."""

    def test_buoy_payload(self):
        problem = tally_meaning.read(BUOY)
        self.assertEqual((problem.bits, tally_reference.count(problem)), (13, 49))
        self.assertEqual(tally_reference.best(problem), {"aim": "most", "value": 25, "count": "1"})

    def test_choir_seating(self):
        problem = tally_meaning.read(CHOIR)
        self.assertEqual((problem.bits, tally_reference.count(problem)), (21, 66))

    def test_greenhouse_benches(self):
        problem = tally_meaning.read(GREENHOUSE)
        self.assertEqual((problem.bits, tally_reference.count(problem)), (18, 410))

    def test_bakery_ovens(self):
        problem = tally_meaning.read(BAKERY)
        self.assertEqual((problem.bits, tally_reference.count(problem)), (24, 752))
        self.assertEqual(tally_reference.best(problem), {"aim": "least", "value": 7, "count": "24"})

    def test_shift_roster(self):
        problem = tally_meaning.read(ROSTER)
        self.assertEqual((problem.bits, tally_reference.count(problem)), (40, 12928))

    def test_irrigation_valves(self):
        problem = tally_meaning.read(VALVES)
        self.assertEqual((problem.bits, tally_reference.count(problem)), (14, 0))


class PublishedCounts(unittest.TestCase):
    """OEIS numbers were read in the public OEIS data or computed by exhaustive search, as the project's notes say."""

    def test_queens(self):  # OEIS A000170
        found = [count(QUEENS, n=str(n)) for n in range(1, 9)]
        self.assertEqual(found, [1, 0, 0, 2, 10, 4, 40, 92])

    def test_derangements(self):  # OEIS A000166
        text = "known n = 3 pick p[i in 1 to n] in 1 to n must different [p[i] for i in 1 to n]"
        text += " must none of [p[i] = i for i in 1 to n]"
        self.assertEqual([count(text, n=str(n)) for n in range(1, 7)], [0, 1, 2, 9, 44, 265])

    def test_descents(self):  # Eulerian numbers, OEIS A008292, n = 4
        text = "known k = 0 pick p[i in 1 to 4] in 1 to 4 must different [p[i] for i in 1 to 4]"
        text += " must exactly k of [p[i] > p[i + 1] for i in 1 to 3]"
        self.assertEqual([count(text, k=str(k)) for k in range(4)], [1, 11, 11, 1])

    def test_domino_tilings(self):  # OEIS A004003: 4 x 4 has 36
        text = "pick across[r in 1 to 4, c in 1 to 3] pick down[r in 1 to 3, c in 1 to 4]"
        text += """ must all of [exactly 1 of [if k = 1 then c < 4 and across[r, c] else if k = 2 then c > 1 and
            across[r, c - 1] else if k = 3 then r < 4 and down[r, c] else r > 1 and down[r - 1, c] for k in 1 to 4]
            for r in 1 to 4, c in 1 to 4]"""
        self.assertEqual(count(text), 36)

    def test_grid_independent_sets(self):  # OEIS A006506: 4 x 4 has 1234
        text = "pick s[r in 1 to 4, c in 1 to 4] must none of [s[r, c] and s[r, c + 1] for r in 1 to 4, c in 1 to 3]"
        text += " must all of [not (s[r, c] and s[r + 1, c]) for r in 1 to 3, c in 1 to 4]"
        self.assertEqual(count(text), 1234)

    def test_magic_squares(self):  # OEIS A006052 with its 8 symmetries
        text = """pick m[r in 1 to 3, c in 1 to 3] in 1 to 9
            must different [m[r, c] for r in 1 to 3, c in 1 to 3]
            must all of [sum [m[r, c] for c in 1 to 3] = 15 = sum [m[c, r] for c in 1 to 3] for r in 1 to 3]
            must sum [m[i, i] for i in 1 to 3] = 15 must sum [m[i, 4 - i] for i in 1 to 3] = 15"""
        self.assertEqual(count(text), 8)

    def test_numbers(self):  # sums over w-bit numbers, w = 4; all from the project's table, computed exhaustively
        pair = "pick a in 0 to 15 pick b in 0 to 15 must "
        self.assertEqual(count(pair + "a < b"), 120)
        self.assertEqual(count(pair + "a + b < 16"), 136)
        self.assertEqual(count(pair + "a * b < 16"), 76)
        self.assertEqual(count(pair + "a * b = b * b"), 31)
        self.assertEqual(count(pair + "a * b = 143"), 2)

    def test_squares_modulo_a_power_of_two(self):  # x^2 = 4 modulo 2^w, w = 3..6
        found = [count(f"pick x in 0 to {2**w - 1} must x * x mod {2**w} = 4") for w in range(3, 7)]
        self.assertEqual(found, [2, 4, 8, 8])

    def test_subset_sum(self):  # twelve weights, sum 100
        text = "known w = [3, 5, 6, 9, 11, 14, 18, 20, 23, 27, 30, 34] pick on[i in 1 to 12]"
        self.assertEqual(count(text + " must sum [w[i] * on[i] for i in 1 to 12] = 100"), 50)

    def test_tseitin_three_cube(self):  # even charge: 2^(12 - 8 + 1) = 32
        text = "pick e[v in 0 to 3, d in 1 to 3] must all of [even [e[(if d = 1 then u / 2 else if d = 2 then"
        text += " u / 4 * 2 + u mod 2 else u mod 4), d] for d in 1 to 3] for u in 0 to 7]"
        self.assertEqual(count(text), 32)


class Meaning(unittest.TestCase):
    """Single rules of the language."""

    def check(self, expected, text):
        self.assertEqual(count(text), expected, text)

    def test_encoding(self):
        text = "kind K = a | b | c pick x in 3 to 5 pick k in K pick on pick one_value in 7 to 7 must x = 4 must k = c must on"
        problem = tally_meaning.read(text)
        self.assertEqual(problem.bits, 5)
        self.assertEqual(tally_reference.codes(problem), {0b11001})

    def test_rounding_down(self):
        for a in (-7, -1, 0, 6):
            self.check(1, f"pick x in {a} to {a} must x / 3 = {a // 3} and x mod 3 = {a % 3}")

    def test_binding(self):
        self.check(1, "must 2 + 3 * 4 - 1 = 13 must - 2 * 3 = -6 must 7 - 2 - 1 = 4 must 20 / 3 / 2 = 3")
        self.check(3, "pick a pick b pick c must a needs b needs c must a or b or c must a = b or a = c must not a = c or a")
        self.check(1, "must 7 = 1 + if no then 1 else 2 * 3 must (if yes then 1 else 2) + 1 = 2")

    def test_needs_groups_to_the_right(self):
        self.check(7, "pick a pick b pick c must a needs b needs c")

    def test_not_binds_looser_than_comparison(self):
        self.check(2, "pick a pick b must not a = b")

    def test_words(self):
        rows = "pick a[i in 1 to 4] must "
        row = "[a[i] for i in 1 to 4]"
        for words, expected in {
            "all of": 1, "some of": 15, "none of": 1, "exactly 2 of": 6, "at least 3 of": 5, "at most 1 of": 5,
            "odd": 8, "even": 8, "different": 0,
        }.items():
            self.check(expected, f"{rows}{words} {row}")
        self.check(4, f"{rows}number of {row} = 3")
        self.check(1, f"{rows}sum {row} = 4")
        self.check(1, f"{rows}smallest {row} = 1")
        self.check(15, f"{rows}largest {row} = 1")

    def test_empty_rows(self):
        for holds in ("all of []", "none of []", "different []", "even []", "sum [] = 0", "number of [] = 0",
                      "sum [i for i in 3 to 2] = 0", "exactly 0 of []"):
            self.check(1, f"must {holds}")
        for fails in ("some of []", "odd []", "at least 1 of []"):
            self.check(0, f"must {fails}")

    def test_chains_and_tables(self):
        self.check(10, "pick a in 1 to 5 pick b in 1 to 5 pick c in 1 to 5 must a < b < c")
        self.check(5, "pick a in 1 to 5 pick b in 1 to 5 pick c in 1 to 5 must a = b = c")
        self.check(2, "pick a in 1 to 5 must a one of [2, 4, 9]")
        self.check(4, "pick a in 1 to 4 pick b in 1 to 4 must (a, b) one of [(i, i + 1 - i / 4) for i in 1 to 4]")

    def test_rows_indexed_by_picks(self):
        self.check(2, "known w = [5, 3, 5] pick i in 1 to 3 must w[i] = 5")
        self.check(4, "pick on[i in 0 to 2] pick j in 0 to 2 must on[j] must number of [on[i] for i in 0 to 2] = 2 must j != 1")
        self.check(3, "pick x in 1 to 6 known w = [1, 2] must w[x mod 2 + 1] = 1")

    def test_generators_over_kinds_and_constants(self):
        self.check(6, "kind K = a | b | c pick m[k in K] in K must different [m[k] for k in K]")
        self.check(2, "known w = [2, 7] pick x in 0 to 9 must some of [x = v for v in w]")

    def test_constant_conditions_kill(self):
        self.check(1, "known w = [1, 2] must if 1 = 2 then w[9] = 1 else yes")
        self.check(1, "known w = [1, 2] must all of [i < 2 needs w[i + 1] = 2 for i in 1 to 2]")

    def test_constant_conditions_kill_on_either_side(self):
        self.check(1, "known w = [1, 2] must all of [w[i + 1] = 2 or i = 2 for i in 1 to 2]")
        self.check(0, "known w = [1, 2] must w[9] = 1 and no")
        self.check(1, "known w = [1, 2] must some of [w[9] = 1, yes] must not all of [w[9] = 1, no]")

    def test_where_the_description_is_silent(self):
        self.check(2, "pick a pick b let both = [a, b,] must odd [both[1], both[2],]")
        self.check(2, "pick x in 1 to 4 must some of [x = v for v in [2, 4, 6]]")
        self.check(1, 'title "a \\"b\\"" must -9223372036854775808 < 0')

    def test_settings(self):
        text = "known n = 3 known m = n + 1 pick x in 1 to m"
        self.assertEqual(count(text), 4)
        self.assertEqual(count(text, n="2 * 4"), 9)

    def test_objective_counts_all_best(self):
        problem = tally_meaning.read("pick a in 1 to 3 pick b in 1 to 3 pick free most a - b + 1 must a != 3")
        self.assertEqual(tally_reference.best(problem), {"aim": "most", "value": 2, "count": "2"})
        self.assertEqual(tally_reference.count(problem), 12)

    def test_unused_variables_and_parts_multiply(self):
        self.check(2**70, "pick a[i in 1 to 70]")
        self.check(3**40, "pick a[i in 1 to 40, j in 1 to 2] must all of [a[i, 1] or a[i, 2] for i in 1 to 40]")


class Refused(unittest.TestCase):
    """Texts that the language does not allow."""

    CASES = [
        "pick a pick a", "must x", "pick a in 1 to 3 must a", "pick a must a + yes", "pick a must a < yes",
        "pick a pick b pick c must a and b or c", "must 1 < 2 > 1", "must 1 != 2 != 1", "must 1 = 1 < 2",
        "pick x in 5 to 4", "pick x in 1 to 3 must 6 / x = 2", "must 4 mod 0 = 0", "must smallest [] = 0",
        "kind K = a | b kind L = c | d must a = c", "kind K = a | b must a < b", "kind K = a | b must a = 1",
        "known w = [1, 2] pick i in 1 to 3 must w[i] = 1", "known w = [1, 2] must w[3] = 1",
        "known w = [1, 2] must w[1, 1] = 1", "pick sum", "pick i must all of [yes for i in 1 to 2]",
        "title \"a\" title \"b\"", "pick a least a most a", "must (1, 2)", "must (1, 2) = (1, 2)",
        "must (1, 2) one of [(1, 2, 3)]", "must 9999999999999999999 > 1", "must -9223372036854775809 < 1",
        "known w = [1, 2] pick a must a and w[3] = 1", "known w = [1, 2] must no and v[1] = 1", "must 3000000000 * 4000000000 > 1",
        "pick a must some of [yes for i in 1 to 2 with a]", "known w = [1, yes]", "must if yes then 1 else no",
        "pick x in 1 to 3 must odd [x]", "must all [yes]", "must 1 ? 2", "pick a known k = a", "pick a let b = a pick b",
        "known w[i in 1 to 3] = [1, 2]", "must 1.5 = 2", "must", "must 1 + if no then 1 else 2 * 3 = 7 or yes", "title buoy",
    ]

    def test_refused(self):
        for text in self.CASES:
            with self.subTest(text=text), self.assertRaises(TallyError):
                count(text)

    def test_unknown_setting(self):
        with self.assertRaises(TallyError):
            count("pick a", n="3")

    def test_place_of_an_error(self):
        with self.assertRaisesRegex(TallyError, "line 2, column 8"):
            count("pick a\nmust a ! b")


if __name__ == "__main__":
    unittest.main()
