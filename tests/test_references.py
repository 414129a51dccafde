"""Reference lists and ranges, against a plain enumeration written here."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from checker import limits
from checker.readers.references import Remark, listed, look_like_references

CASES = {
    "C1, C2;C3 C4\nC5": ("C1 C2 C3 C4 C5", ""),
    "C1-C3": ("C1 C2 C3", ""),
    "C1–C3,C7": ("C1 C2 C3 C7", ""),
    "C1 - C3": ("C1 C2 C3", ""),
    "R1..R3": ("R1 R2 R3", ""),
    "R1-3": ("R1 R2 R3", ""),
    "R1 to R3": ("R1 R2 R3", ""),
    "R1 TO 3": ("R1 R2 R3", ""),
    "R1~R3": ("R1 R2 R3", ""),
    "R08-R11": ("R08 R09 R10 R11", ""),
    "R7-R7": ("R7", ""),
    "J1-1": ("J1-1", ""),
    "U1A, U1-B": ("U1A U1-B", ""),
    "A1-B3": ("A1-B3", ""),
    "USB-UART1": ("USB-UART1", ""),
    "TP_I1P_0": ("TP_I1P_0", ""),
    "Digital_0-7": ("Digital_0-7", ""),
    "MIC5225-3.3YM5-TR": ("MIC5225-3.3YM5-TR", ""),
    "DFLZ6V2-7": ("DFLZ6V2-7", ""),
    "P1-P4 +3*": ("P1 P2 P3 P4", "+3*"),
    "R1 (R2)": ("R1", "(R2)"),
    "(R1, R2)": ("R1 R2", ""),
    "R1 - 10k": ("R1", "- 10k"),
    "R4-R1": ("", "R4-R1"),
    "R1-R5000": ("", "R1-R5000"),
    "R1…R3": ("R1 R2 R3", ""),
    "R1- R3": ("R1 R2 R3", ""),
    "r1-R3": ("r1 r2 r3", ""),
    "D1 bis D3": ("D1 D2 D3", ""),
    "C1 à C3": ("C1 C2 C3", ""),
    "R 1, R 2": ("R1 R2", ""),
    "IC 1 IC 2": ("IC1 IC2", ""),
    "R 1 - R 3": ("R1 R2 R3", ""),
    "R1 and R2, R3 und R4": ("R1 R2 R3 R4", ""),
    "R1/R2": ("R1 R2", ""),
    "R1*, R2.": ("R1 R2", ""),
    "R1\u200b,\u00a0R2": ("R1 R2", ""),
    "C1 C2 Ck": ("C1 C2", "Ck"),
    "J1, GND": ("J1", "GND"),
    "j1, in": ("j1", "in"),
    "R?": ("", "R?"),
    "Ck": ("Ck", ""),
    "IN, OUT": ("IN OUT", ""),
    "C1, C1": ("C1", ""),
    "": ("", ""),
}


@pytest.mark.parametrize("text", CASES)
def test_cells(text):
    refs, unread = CASES[text]
    found = listed(text)
    assert (found.refs, found.unread, found.remarks) == (tuple(refs.split()), unread, ())


REMARKS = {
    "R1-R3 (optional)": ("R1 R2 R3", "(optional)", "R1 R2 R3"),
    "R1, R2 only for 115 V": ("R1 R2", "only for 115 V", "R2"),
    "R1, R2 only with R3": ("R1 R2", "only with R3", "R2"),
    "R1, R2, nur bei 230 V": ("R1 R2", "nur bei 230 V", "R2"),
    "R1 (DNP), R2": ("R1 R2", "(DNP)", "R1"),
    "R1(DNP)": ("R1", "(DNP)", "R1"),
    "R5 NOT FITTED": ("R5", "NOT FITTED", "R5"),
    "R1 (a (b) c), R4": ("R1 R4", "(a (b) c)", "R1"),
    "R1 [x]": ("R1", "[x]", "R1"),
    "R1, R2 - optional": ("R1 R2", "- optional", "R2"),
    "R1, R2 and others": ("R1 R2", "others", "R2"),
    "C1, C2 (see note)": ("C1 C2", "(see note)", "C2"),
}


@pytest.mark.parametrize("text", REMARKS)
def test_words_beside_references_are_no_references(text):
    refs, remark, of = REMARKS[text]
    found = listed(text)
    assert (found.refs, found.unread, found.remarks) == (tuple(refs.split()), "", (Remark(remark, tuple(of.split())),))


def test_references_given_twice():
    assert listed("C1, C2, C1-C3").repeated == ("C1", "C2")
    assert listed("C1, C2").repeated == ()


@pytest.mark.parametrize("text", ["(" * 60_000, "R1 " + "(a" * 40_000, "a " * 40_000, "R1 " + "- " * 40_000, "R1 [" + "(" * 50_000])
def test_odd_long_cells_take_no_odd_time(text):
    assert listed(text).refs in ((), ("R1",), ("a",))


@pytest.mark.parametrize(
    "text, expected",
    [
        ("R1", True),
        ("R 1, R 2", True),
        ("R1/R2", True),
        ("C1-C4", True),
        ("R?", True),
        ("U1A", True),
        ("1", False),
        ("100n", False),
        ("Resistor, 0603", False),
        ("", False),
    ],
)
def test_shape(text, expected):
    assert look_like_references(text) is expected


ITEM = st.tuples(
    st.sampled_from(["R", "C", "LED", "Q_"]), st.integers(0, 300), st.integers(0, 40), st.integers(0, 5), st.booleans()
)
DASHES = ("-", "–", "..", " to ", " - ")


@given(st.lists(ITEM, max_size=12), st.sampled_from([", ", ",", ";", " ", "\n"]))
def test_ranges_against_enumeration(items, separator):
    words, expected = [], []
    for letters, first, count, dash, zero in items:
        width = 4 if zero else 0
        numbers = [str(number).rjust(width, "0") for number in range(first, first + count + 1)]
        expected += [letters + number for number in numbers]
        words.append(letters + numbers[0] + (DASHES[dash % 5] + letters + numbers[-1] if count else ""))
    found = listed(separator.join(words))
    assert (found.refs, found.unread, found.remarks) == (tuple(dict.fromkeys(expected)), "", ())
    assert found.repeated == tuple(dict.fromkeys(ref for ref in expected if expected.count(ref) > 1))


@given(st.text(max_size=60))
def test_any_text_is_answered(text):
    found = listed(text)
    assert len(set(found.refs)) == len(found.refs)
    assert all(ref and not ref.isspace() for ref in found.refs)
    assert not found.refs or found.unread != text or not text
    assert all(set(remark.refs) <= set(found.refs) for remark in found.remarks)


def test_limit_of_one_cell():
    text = ",".join(f"R{1 + 1000 * n}-R{1000 * n + 1000}" for n in range(21))
    with pytest.raises(ValueError, match=f"{limits.REFERENCES_PER_ROW:,}"):
        listed(text)
