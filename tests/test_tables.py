"""Tables of figures: they rise as they must, stay in range, hold spot values of their sources, and are read as they say."""

from __future__ import annotations

import math
from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from checker import rulesets
from checker.errors import InputError
from checker.formulas.lookup import column_of, last, look_up, rounded
from checker.model.table import Table

SHIPPED = ("iec-62368-1", "iec-60664-1")
# the tables of this file's subject; each must exist in the ruleset
FIGURES = {
    "iec-62368-1": (
        "mains-transient temporary-overvoltage clearance-steady clearance-high-frequency clearance-pollution clearance-withstand "
        "altitude creepage creepage-high-frequency creepage-pollution test-by-transient test-by-temporary-overvoltage"
    ).split(),
    "iec-60664-1": "rated-impulse preferred-impulse clearance-impulse clearance-steady altitude creepage".split(),
}
ALL = [(name, table) for name, tables in FIGURES.items() for table in tables]
RANGE = {"mm": (0.001, 300.0), "V peak": (300.0, 20000.0), "1": (0.5, 20.0)}  # what a cell of that unit can be here


def table(ruleset: str, name: str) -> Table:
    return rulesets.load(ruleset).tables[name]


def column(of: Table, name: str) -> list[float]:
    at = list(of.columns).index(name)
    return [row[at] for row in of.rows if row[at] is not None]


@pytest.mark.parametrize(("ruleset", "name"), ALL)
def test_no_figure_falls_from_row_to_row(ruleset, name):
    found = table(ruleset, name)
    for each in found.columns:
        figures = column(found, each)
        assert figures == sorted(figures), each
    keys = column(found, next(iter(found.columns)))
    assert len(set(keys)) == len(keys)


@pytest.mark.parametrize(("ruleset", "name"), ALL)
def test_no_cell_is_out_of_range(ruleset, name):
    found = table(ruleset, name)
    for each, unit in list(found.columns.items())[1:]:
        low, high = RANGE[unit]
        assert all(low <= cell <= high for cell in column(found, each)), each


@pytest.mark.parametrize(("ruleset", "name"), ALL)
def test_what_is_harder_never_asks_for_less(ruleset, name):
    """Pollution degree 1 to 3, group I to III, category I to IV, basic to reinforced, 100 to 400 kHz."""
    found = table(ruleset, name)
    orders = ([f"{grade}{degree}" for degree in ("pd1", "pd2", "pd3")] for grade in ("", "basic_", "reinforced_"))
    more = (
        ["pd2_i", "pd2_ii", "pd2_iii"], ["pd3_i", "pd3_ii", "pd3_iii"], ["pd1", "pd2_i", "pd3_i"],
        ["ovc_i", "ovc_ii", "ovc_iii", "ovc_iv"], ["basic", "reinforced"], ["basic_pd2", "reinforced_pd2"],
        ["khz_100", "khz_200", "khz_400"],
    )  # fmt: skip
    for order in (*orders, *more):
        places = [list(found.columns).index(each) for each in order if each in found.columns]
        for row in found.rows:
            cells = [row[place] for place in places if row[place] is not None]
            assert cells == sorted(cells), (order, row)


# Two cells of each table, typed from the source that is named. Keys: ../shared/reference/standards.yaml.
SPOTS = [
    ("iec-62368-1", "mains-transient", 240, "ovc_ii", 2500),  # test reports, mains transient 2500 V peak (a_boto11, a_gl44)
    ("iec-62368-1", "mains-transient", 300, "ovc_iii", 4000),  # connector manual page 11 (a_harting41612)
    ("iec-62368-1", "temporary-overvoltage", 230, "overvoltage", 2000),  # product-safety list (a_pstc80046)
    ("iec-62368-1", "temporary-overvoltage", 480, "overvoltage", 2500),  # from memory
    ("iec-62368-1", "clearance-steady", 2000, "basic_pd2", 1.27),  # table F.7a, from memory
    ("iec-62368-1", "clearance-steady", 800, "reinforced_pd2", 0.4),  # from memory
    ("iec-62368-1", "clearance-high-frequency", 1000, "basic", 0.6),  # copy of table 11 (a_readit)
    ("iec-62368-1", "clearance-high-frequency", 1400, "reinforced", 5.64),  # copy of table 11 (a_readit)
    ("iec-62368-1", "clearance-pollution", 1, "factor", 0.8),  # copy of table 11 (a_readit)
    ("iec-62368-1", "clearance-pollution", 3, "factor", 1.4),  # copy of table 11 (a_readit)
    ("iec-62368-1", "clearance-withstand", 2500, "basic_pd2", 1.5),  # test report page 43 (a_gl44)
    ("iec-62368-1", "clearance-withstand", 2500, "reinforced_pd2", 3.0),  # test report page 43 (a_gl44)
    ("iec-62368-1", "altitude", 3000, "factor", 1.14),  # product-safety list, 14 % more (a_alt14)
    ("iec-62368-1", "altitude", 5000, "factor", 1.48),  # terminal manual page 17 (a_wago_a2)
    ("iec-62368-1", "creepage", 250, "pd2_iii", 2.5),  # terminal catalogue page 596 (a_wago_f4); 5.0 reinforced (a_gl44)
    ("iec-62368-1", "creepage", 630, "pd3_i", 8.0),  # terminal catalogue page 596 (a_wago_f4)
    ("iec-62368-1", "creepage-high-frequency", 1000, "khz_100", 0.6),  # from memory
    ("iec-62368-1", "creepage-high-frequency", 1200, "khz_400", 8.2),  # from memory
    ("iec-62368-1", "creepage-pollution", 2, "factor", 1.2),  # from memory
    ("iec-62368-1", "creepage-pollution", 3, "factor", 1.4),  # from memory
    ("iec-62368-1", "test-by-transient", 2500, "reinforced", 4000),  # test report page 44 (a_gl45)
    ("iec-62368-1", "test-by-transient", 2500, "basic", 2500),  # from memory
    ("iec-62368-1", "test-by-temporary-overvoltage", 230, "reinforced", 4000),  # from memory
    ("iec-62368-1", "test-by-temporary-overvoltage", 400, "basic", 2500),  # from memory
    ("iec-60664-1", "rated-impulse", 1000, "ovc_ii", 6000),  # isolated amplifier data sheet (a_amc1411)
    ("iec-60664-1", "rated-impulse", 300, "ovc_ii", 2500),  # national edition of IEC 60255-27, table D.3 (a_gost_60255_27)
    ("iec-60664-1", "preferred-impulse", 330, "impulse", 330),  # connector manual page 11 (a_harting41612)
    ("iec-60664-1", "preferred-impulse", 12000, "impulse", 12000),  # connector manual page 11 (a_harting41612)
    ("iec-60664-1", "clearance-impulse", 8000, "pd2", 8.0),  # connector manual (a_harting41612), data sheet (a_amc1411)
    ("iec-60664-1", "clearance-impulse", 1500, "pd3", 0.8),  # rail administration rules (a_banenor)
    ("iec-60664-1", "clearance-steady", 2000, "basic", 1.27),  # from memory
    ("iec-60664-1", "clearance-steady", 10000, "basic", 15.2),  # from memory
    ("iec-60664-1", "altitude", 4000, "factor", 1.29),  # terminal manual page 17 (a_wago_a2)
    ("iec-60664-1", "altitude", 20000, "factor", 14.5),  # terminal manual page 17 (a_wago_a2)
    ("iec-60664-1", "creepage", 400, "pd2_iii", 4.0),  # terminal catalogue page 596 (a_wago_f4)
    ("iec-60664-1", "creepage", 1000, "pd2_i", 5.0),  # terminal catalogue page 596 (a_wago_f4)
]


@pytest.mark.parametrize(("ruleset", "name", "key", "cell", "figure"), SPOTS)
def test_a_cell_is_that_of_its_source(ruleset, name, key, cell, figure):
    found = table(ruleset, name)
    if found.lookup == "interpolate":
        assert float(key) in column(found, next(iter(found.columns)))
    assert look_up(found, cell, float(key)).value == figure


def test_every_table_has_two_spot_cells():
    assert {spot[:2] for spot in SPOTS} == set(ALL)
    assert all(sum(spot[:2] == each for spot in SPOTS) == 2 for each in ALL)


def test_where_the_product_standard_takes_the_basic_one_the_figures_are_the_same():
    one, other = table("iec-62368-1", "creepage"), table("iec-60664-1", "creepage")
    assert one.rows == other.rows
    basic = {row[0]: row[1:4] for row in table("iec-62368-1", "clearance-withstand").rows}
    assert all(basic[row[0]] == row[1:4] for row in table("iec-60664-1", "clearance-impulse").rows)
    grid = {row[0]: row[1:] for row in table("iec-60664-1", "rated-impulse").rows}
    assert all(grid[row[0]] == row[1:] for row in table("iec-62368-1", "mains-transient").rows)


# lookup and rounding

SMALL = Table(
    "t", {"voltage": "V rms", "pd2": "mm", "gap": "mm"}, "interpolate",
    ((100.0, 1.0, None), (200.0, 2.0, 0.5), (250.0, 2.5, 0.9)), "S", "true", "up to 0.1 mm",
)  # fmt: skip


@pytest.mark.parametrize(
    ("key", "value", "keys"),
    [
        (0.0, 1.0, (100.0,)),  # below the first row the first row
        (100.0, 1.0, (100.0,)),
        (101.0, 1.1, (100.0, 200.0)),
        (240.0, 2.4, (200.0, 250.0)),  # 2.4000000000000004 in floats
        (241.0, 2.5, (200.0, 250.0)),
        (250.0, 2.5, (250.0,)),
        (250.0 * (1 + 1e-12), 2.5, (250.0,)),
    ],
)
def test_a_value_between_rows_is_interpolated_and_rounded_up(key, value, keys):
    found = look_up(SMALL, "pd2", key)
    assert (found.value, found.keys) == (value, keys)


def test_nothing_is_read_beyond_the_last_row_or_where_no_figure_stands():
    assert look_up(SMALL, "pd2", 250.1) is None
    assert look_up(SMALL, "gap", 100.0) is None
    assert look_up(SMALL, "gap", 150.0).value == 0.5  # no lower figure: the higher row
    assert last(SMALL, "pd2").value == 2.5


def test_the_higher_row_is_taken_where_a_table_or_a_clause_says_so():
    assert look_up(replace(SMALL, lookup="next-higher"), "pd2", 201.0).value == 2.5
    assert look_up(SMALL, "pd2", 201.0, "next-higher").value == 2.5
    assert look_up(replace(SMALL, lookup="exact"), "pd2", 201.0) is None
    assert look_up(replace(SMALL, lookup="exact"), "pd2", 200.0).value == 2.0


def test_the_more_specific_column_wins():
    assert column_of(SMALL, ("pd2_iiib", "pd2_iii", "pd2")) == "pd2"
    assert column_of(SMALL, ("pd3_iiib", "pd3")) is None


@given(st.floats(100.0, 250.0, allow_nan=False))
def test_interpolation_is_exact_arithmetic_rounded_up(key):
    """Against fractions: the straight line through the two rows, up to the next tenth."""
    found = look_up(SMALL, "pd2", key)
    x = Fraction(key)
    low, high, at, to = (
        (Fraction(100), Fraction(200), Fraction(1), Fraction(2))
        if x <= 200
        else (Fraction(200), Fraction(250), Fraction(2), Fraction(5, 2))
    )
    line = at + (to - at) * (x - low) / (high - low)
    tenths = math.ceil(line * 10 * (1 - Fraction(1, 10**9)))
    assert abs(Fraction(found.value) * 10 - tenths) < Fraction(1, 10**6)
    assert found.value >= float(line) - 1e-8


@given(st.floats(100.0, 250.0), st.floats(100.0, 250.0))
def test_a_higher_voltage_never_needs_less(one, other):
    low, high = sorted((one, other))
    assert look_up(SMALL, "pd2", low).value <= look_up(SMALL, "pd2", high).value


@pytest.mark.parametrize(
    ("value", "way", "figure"),
    [
        (2.81, "up to 0.1 mm", 2.9),  # 281 V of a test report to IEC 60950-1: 2.81 -> 2.9 (b_tuv87)
        (2.5000000001, "up to 0.1 mm", 2.5),
        (2.44, "nearest to 0.1 mm", 2.4),
        (2.25, "", 2.25),
        (0.123, "up to 0.01 mm, above 0.5 mm to 0.1 mm", 0.13),
        (0.5, "up to 0.01 mm, above 0.5 mm to 0.1 mm", 0.5),
        (0.51, "up to 0.01 mm, above 0.5 mm to 0.1 mm", 0.6),
        (4.44, "up to 0.01 mm, above 0.5 mm to 0.1 mm", 4.5),  # 3.0 mm x 1.48
    ],
)
def test_rounding_is_what_the_table_says(value, way, figure):
    assert rounded(value, way) == figure


@given(st.integers(1, 5000))
def test_a_figure_that_is_round_stays(tenths):
    assert rounded(tenths / 10, "up to 0.1 mm") == tenths / 10
    assert rounded(tenths * 0.1, "up to 0.1 mm") == tenths / 10  # float noise of the product


@pytest.mark.parametrize("way", ["up to 0.01 mm, above 0.5 mm", "up to 0.01 mm, above 0.5 V to 0.1 mm", "down to 0.1 mm"])
def test_a_ruleset_with_another_way_of_rounding_is_refused(tmp_path, way):
    path = tmp_path / "house.yaml"
    path.write_text(
        "schema: withstand-ruleset/1\nid: house\nrevision: '1'\nsources: {HB: {title: House handbook}}\ntables:\n"
        "  t: {columns: {voltage: V rms, pd2: mm}, lookup: interpolate, source: HB 3, verified: true, rows: [[100, 1]],\n"
        f"      round: '{way}'}}\n",
        encoding="utf-8",
    )
    with pytest.raises(InputError) as caught:
        rulesets.load(str(path))
    assert caught.value.line == 7
