"""Ratings, classes and approvals out of part text: every row of the table expects the full result, so nothing may be made up."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.identify import marks, ratings
from checker.model.candidate import INSULATING, KINDS
from checker.model.fact import ATTRIBUTES

TABLE = yaml.safe_load((Path(__file__).resolve().parents[1] / "fixtures" / "identify" / "ratings.yaml").read_text("utf-8"))


def shown(rating: ratings.Rating | None) -> str | None:
    return None if rating is None else f"{rating.value:g} {rating.unit} {rating.form}".strip()


def name(value: Any) -> str | None:
    return value.encode("ascii", "replace").decode()[:50] if isinstance(value, str) else ""


@pytest.mark.parametrize("text, kind, rated, attributes", TABLE["read"], ids=name)
def test_read(text: str, kind: str, rated: dict[str, str], attributes: dict[str, str]) -> None:
    found = ratings.read(text, kind)
    assert {key: shown(rating) for key, rating in found.ratings.items()} == rated
    assert {key: value for key, (value, _) in found.attributes.items()} == attributes
    for words in [rating.words for rating in found.ratings.values()] + [words for _, words in found.attributes.values()]:
        assert words


@pytest.mark.parametrize("column, cell, expected", TABLE["column"], ids=name)
def test_column(column: str, cell: str, expected: str | None) -> None:
    assert shown(ratings.column(column, cell)) == expected


@pytest.mark.parametrize("text, names", TABLE["marks"], ids=name)
def test_marks(text: str, names: list[str]) -> None:
    assert [mark for mark, _ in marks.read(text)] == names


@pytest.mark.parametrize("cell, names", TABLE["mark column"], ids=name)
def test_mark_column(cell: str, names: list[str]) -> None:
    assert [mark for mark, _ in marks.column(cell)] == names


@pytest.mark.parametrize("text, expected", TABLE["class voltages"], ids=name)
def test_class_voltages(text: str, expected: dict[str, float]) -> None:
    assert marks.class_voltages(text) == expected


def test_the_table_is_large_and_names_known_things() -> None:
    assert len(TABLE["read"]) >= 120
    assert {kind for _, kind, _, _ in TABLE["read"]} <= KINDS
    known = {attribute.removeprefix("rating:") for attribute in ATTRIBUTES}
    assert {key for _, _, rated, _ in TABLE["read"] for key in rated} <= known


VOLTAGES = st.sampled_from(["5V", "12 V", "230VAC", "600V", "1kV", "3750Vrms", "5 KV", "6kVpk", "1500 VDC"])
WORDS = st.sampled_from(["", "coil", "SMD", "4DIP", "isolation", "isolated", "DC/DC", "10A", "50mA", "test", "8-SOIC", "surge"])


@settings(max_examples=300, deadline=None)
@given(st.lists(st.tuples(VOLTAGES, WORDS), max_size=5), st.sampled_from(sorted(INSULATING)))
def test_no_working_voltage_without_the_word(pieces: list[tuple[str, str]], kind: str) -> None:
    found = ratings.read(" ".join(f"{volts} {word}" for volts, word in pieces), kind)
    assert "isolation_working" not in found.ratings
    assert "voltage" not in found.ratings or kind in ("relay", "solid-state-relay")
    test = found.ratings.get("isolation_test")
    assert test is None or test.value >= 100


@settings(max_examples=300, deadline=None)
@given(st.text(alphabet="XY123 45-/_.,:htpswcomVaK?()", max_size=40))
def test_links_and_types_never_give_a_class(tail: str) -> None:
    link = "https://example.org/" + tail.replace(" ", "")
    assert marks.read(link) == ()
    assert marks.read("ABC" + "".join(letter for letter in tail if letter.isalnum())) == ()
    assert ratings.read(link, "capacitor") == ratings.Found()


@settings(max_examples=300, deadline=None)
@given(
    st.text(max_size=80),
    st.sampled_from(sorted(KINDS)),
    st.sampled_from(["voltage", "power", "temperature", "creepage", "tolerance"]),
)
def test_any_text_is_survived(text: str, kind: str, column: str) -> None:
    for rating in ratings.read(text, kind).ratings.values():
        assert rating.value > 0
    ratings.column(column, text)
    marks.read(text)
    marks.column(text)
    marks.class_voltages(text)
