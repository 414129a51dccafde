"""Reference lists and ranges, against a plain enumeration written here."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from checker import limits
from checker.readers.references import expand, look_like_references

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
    "C1, C2 (see note)": ("C1 C2", "(see note)"),
    "R1 - 10k": ("R1", "- 10k"),
    "R4-R1": ("", "R4-R1"),
    "R1-R5000": ("", "R1-R5000"),
    "R?": ("", "R?"),
    "Ck": ("Ck", ""),
    "IN, OUT": ("IN OUT", ""),
    "C1, C1": ("C1", ""),
    "": ("", ""),
}


@pytest.mark.parametrize("text", CASES)
def test_cells(text):
    refs, unread = CASES[text]
    assert expand(text) == (tuple(refs.split()), unread)


@pytest.mark.parametrize(
    "text, expected",
    [
        ("R1", True),
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
    assert expand(separator.join(words)) == (tuple(dict.fromkeys(expected)), "")


@given(st.text(max_size=60))
def test_any_text_is_answered(text):
    refs, unread = expand(text)
    assert len(set(refs)) == len(refs)
    assert all(ref and not ref.isspace() for ref in refs)
    assert not refs or unread != text or not text


def test_limit_of_one_cell():
    text = ",".join(f"R{1 + 1000 * n}-R{1000 * n + 1000}" for n in range(21))
    with pytest.raises(ValueError, match=f"{limits.REFERENCES_PER_ROW:,}"):
        expand(text)
