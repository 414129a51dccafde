"""Strict YAML: what is accepted stays text with its place; everything that could surprise a reader is refused by line."""

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import limits, strict_yaml
from checker.errors import InputError
from checker.files import Blob
from checker.strict_yaml import Node, either, load, suggestion


def root(text):
    return load(Blob("f.yaml", text if isinstance(text, bytes) else text.encode()))


def plain(node: Node):
    """The tree as ordinary lists, dicts and texts."""
    if node.kind == "map":
        return {key.name_text(): plain(value) for key, value in node.entries()}
    return [plain(item) for item in node.items()] if node.kind == "list" else node._value


def refusal(text) -> str:
    with pytest.raises(InputError) as caught:
        root(text)
    return str(caught.value)


@pytest.fixture(params=["c", "python"])
def either_loader(request, monkeypatch):
    if request.param == "python":
        monkeypatch.setattr(strict_yaml, "_LOADER", yaml.SafeLoader)
    elif not hasattr(yaml, "CSafeLoader"):
        pytest.skip("PyYAML without its C loader")


def test_scalars_stay_text(either_loader):
    text = "{a: yes, b: 1_000, c: 012, d: 12:30, e: 1e3, f: 0x1F, g: 2027-01-31, h: .inf, i: 01, j: off, k: =, l: 1.0}"
    written = ["yes", "1_000", "012", "12:30", "1e3", "0x1F", "2027-01-31", ".inf", "01", "off", "=", "1.0"]
    assert plain(root(text).node) == dict(zip("abcdefghijkl", written, strict=True))


def test_places_and_dotted_keys(either_loader):
    node = root("a:\n  b: [x,\n   {c: y}]\n").node.entries()[0][1].entries()[0][1].items()[1].entries()[0][1]
    assert (node.line, node.column, node.key, node.name, node.text()) == (3, 8, "a.b[1].c", "c", "y")


def test_nothing_is_told_from_its_quoted_name(either_loader):
    entries = root("a:\nb: ~\nc: null\nd: 'null'\ne: \"\"\nf: '~'\n")
    assert [entries.take(key) is None for key in "abcdef"] == [True, True, True, False, False, False]
    entries.done()
    assert root("a: 'null'").need("a").text() == "null"
    for text in ("a: ''", "a: '  '"):
        with pytest.raises(InputError, match="`a` is empty"):
            root(text).need("a").text()


@pytest.mark.parametrize("text", ["", "\n", "# only a comment\n", "---\n", "---\n...\n", "{}", "null"])
def test_an_empty_file_is_an_empty_map(text, either_loader):
    root(text).done()


@pytest.mark.parametrize(
    "text, message",
    [
        ("a: 1\nb: &x 2", "f.yaml:2: `&x` names a value for reuse (an anchor). Write the value out."),
        ("a: 1\nb: *x", "f.yaml:2: `*x` refers to another place (an alias). Write the value out."),
        ("a: &x\n  b: 1", "f.yaml:1: `&x` names a value for reuse (an anchor). Write the value out."),
        ("&x a: 1", "f.yaml:1: `&x` names a value for reuse (an anchor). Write the value out."),
        ("<<: {a: 1}", "f.yaml:1: there is a merge key (`<<`). Write the keys out."),
        ("a: 1\na: 2", "f.yaml:2: the key `a` is given twice (first in line 1). Keep one of them."),
        ("a: 1\n'a': 2", "f.yaml:2: the key `a` is given twice (first in line 1). Keep one of them."),
        ("---\na: 1\n---\nb: 1", "f.yaml:3: a second document starts here. Keep one document a file."),
        ("a: 1\n...\n---\n", "f.yaml:3: a second document starts here. Keep one document a file."),
        ("? [a]\n: 1", "f.yaml:1: a key is a list or a map. Keys are plain text."),
        ("{{a: 1}: 2}", "f.yaml:1: a key is a list or a map. Keys are plain text."),
        ("a:\n  '': 1", "f.yaml:2: a key is empty"),
        ("%TAG ! tag:x,2000:\n---\na: 1", "f.yaml:1: there is a %TAG directive. Leave tags out."),
        ("a:\n\tb: 1", "f.yaml:2: there is a tab where only spaces may stand. Indent YAML with spaces."),
        ("- a", "f.yaml:1: the file has the wrong shape; found a list; expected keys and values such as `key: value`"),
        ("just words", "f.yaml:1: the file has the wrong shape; found just words; expected keys and values such as `key: value`"),
        ("a: b: c", "f.yaml:1: this is not valid YAML: mapping values are not allowed"),
        ("a: 1\nb: [1,\nc: 2", "f.yaml:3: this is not valid YAML: while parsing a flow sequence that starts in line 2"),
        ("a: 1\n  b: 2", "f.yaml:2: this is not valid YAML: mapping values are not allowed"),
        ("a: 1\nb: \x07", "f.yaml:2: there is a control character ('\\x07') in the text"),
        ("a: 1\nb: \x00", "f.yaml:2: the file holds NUL characters"),
        ("a: 1\nb: \ufffe", "f.yaml:2: there is a control character ('\\ufffe') in the text"),
        (b"a: 1\nb: \xff", "f.yaml:2: the text is not valid UTF-8; expected YAML in UTF-8. Save it as UTF-8."),
        (b"a: 1\nb: caf\xe9", "f.yaml:2: the text is not valid UTF-8; expected YAML in UTF-8. Save it as UTF-8."),
    ],
)
def test_refused_with_its_line(text, message, either_loader):
    assert refusal(text).startswith(message)


@pytest.mark.parametrize("tag", ["!!python/object/apply:os.system [x]", "!!str x", "!x y", "! x", "!!map {a: 1}", "!!seq []"])
def test_every_tag_is_refused(tag, either_loader):
    assert "f.yaml:2: there is a tag (" in refusal(f"a: 1\nb: {tag}")


def test_a_quoted_merge_key_is_a_key_like_any_other(either_loader):
    assert plain(root("'<<': x").node) == {"<<": "x"}


def test_alias_bomb_ends_at_its_first_anchor():
    bomb = "a: &a [x, x]\n" + "".join(f"{chr(98 + i)}: &{chr(98 + i)} [*{chr(97 + i)}, *{chr(97 + i)}]\n" for i in range(20))
    assert refusal(bomb).startswith("f.yaml:1: `&a`")


def test_nesting_is_bounded_exactly(either_loader):
    fits = limits.YAML_DEPTH - 1  # the root map is the first level
    assert root("a: " + "[" * fits + "]" * fits).take("a") is not None
    assert f"nested more than {limits.YAML_DEPTH} deep" in refusal("a: " + "[" * (fits + 1) + "]" * (fits + 1))
    assert f"nested more than {limits.YAML_DEPTH} deep" in refusal("{a: " * 200_000)
    assert f"nested more than {limits.YAML_DEPTH} deep" in refusal("\n".join(" " * i + "a:" for i in range(100)) + " 1")


def test_number_of_values_is_bounded_exactly(monkeypatch):
    monkeypatch.setattr(limits, "YAML_NODES", 5)  # root, key, list and two items
    assert plain(root("a: [1, 2]").node) == {"a": ["1", "2"]}
    assert "more than 5 values" in refusal("a: [1, 2, 3]")


def test_long_texts_and_files_are_refused():
    assert "a text is longer than 65,536 characters" in refusal("a: " + "x" * (4 * 2**20 - 10))
    assert "the file is too large" in refusal("a: " + "x" * (4 * 2**20))
    assert "a key is longer than 1,024 characters" in refusal(f"? '{'k' * 1_025}'\n: 1")
    assert len(root("a: " + "x" * limits.TOKEN).need("a").text()) == limits.TOKEN
    with pytest.raises(InputError, match=r"`a` is too long; found 1,025 characters; expected at most 1,024"):
        root("a: " + "x" * 1_025).need("a").name_text()


def test_encodings():
    for data in ("a: \u00b5".encode("utf-8-sig"), "a: \u00b5".encode("utf-16"), "a: \u00b5".encode()):
        assert root(data).need("a").text() == "\u00b5"


NAMES = st.text(st.characters(codec="utf-8", categories=("L", "N", "P", "S", "Zs")), min_size=1, max_size=12).filter(str.strip)
TREES = st.recursive(
    NAMES | st.sampled_from(["null", "~", "yes", "1", "<<", "- a", "a: b", "&x", "*x", "!t"]),
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(NAMES, inner, max_size=4),
    max_leaves=15,
)


class _Plain(yaml.SafeDumper):
    def ignore_aliases(self, data):
        return True


@settings(max_examples=150, deadline=None)
@given(st.dictionaries(NAMES, TREES, max_size=4), st.sampled_from([True, False, None]))
def test_what_pyyaml_writes_is_read_back(tree, flow):
    text = yaml.dump(tree, Dumper=_Plain, allow_unicode=True, default_flow_style=flow, sort_keys=False)
    assert plain(root(text).node) == tree


@settings(max_examples=300, deadline=None)
@given(st.text(st.sampled_from("ab:-[]{},&*!|>'\"%#?@ \n\t<~0"), max_size=40) | st.binary(max_size=30))
def test_any_bytes_give_a_map_or_an_input_error(data):
    blob = Blob("f.yaml", data if isinstance(data, bytes) else data.encode())
    try:
        found = load(blob).node.kind
    except InputError as error:
        found = str(error)
    assert found == "map" or found.startswith("f.yaml")


# reading values


def test_flag():
    assert root("a: true").need("a").flag() is True
    assert root("a: false").need("a").flag() is False
    for said in ("yes", "no", "on", "True", "1", "[true]", "0"):
        with pytest.raises(InputError, match=r"`a` is neither true nor false; found .*; expected true or false"):
            root(f"a: {said}").need("a").flag()


def test_one_of():
    choices = ("pluggable-A", "pluggable-B", "permanent")
    assert root("a: Pluggable-a").need("a").one_of(choices) == "pluggable-A"
    with pytest.raises(InputError) as caught:
        root("a: permanant").need("a").one_of(choices)
    assert str(caught.value) == (
        "f.yaml:1: `a` is none of the accepted words; did you mean `permanent`?; found permanant; "
        "expected pluggable-A, pluggable-B or permanent"
    )


def test_numbers():
    assert root("a: 0.8").need("a").number() == 0.8
    assert root("a: -1e3").need("a").number(low=-1000) == -1000
    assert root("a: 3").need("a").whole(1, 3) == 3
    for said in ("1_000", ".nan", ".inf", "nan", "0x10", "1:30", "5 V", "1e999", "\u0663", "012.5.1"):
        with pytest.raises(InputError, match="`a` is not a number"):
            root(f"a: {said}").need("a").number()
    with pytest.raises(InputError, match="out of range; found 2; expected from 0 to 1"):
        root("a: 2").need("a").number(low=0, high=1)
    for said in ("0", "4", "1.0", "x", "\u0663"):
        with pytest.raises(InputError, match=r"out of range; found .*; expected a whole number, from 1 to 3"):
            root(f"a: {said}").need("a").whole(1, 3)


def test_dates():
    assert root("a: 2028-02-29").need("a").date() == "2028-02-29"
    for said in ("2027-02-29", "20270131", "2027-W01-1", "31.1.2027", "2027-1-31", "\u0662027-01-31"):
        with pytest.raises(InputError, match="`a` is not a date"):
            root(f"a: {said}").need("a").date()


def test_one_or_several_texts():
    assert root("a: x").need("a").texts() == ("x",)
    assert root("a: [x, 1, '~']").need("a").texts() == ("x", "1", "~")
    assert root("a: []").need("a").names() == ()
    for said, key in (("[x, ~]", r"a\[1\]"), ("[[x]]", r"a\[0\]"), ("{x: y}", "a")):
        with pytest.raises(InputError, match=f"`{key}` "):
            root(f"a: {said}").need("a").texts()


@pytest.mark.parametrize(
    "read, said, message",
    [
        (Node.text, "[x]", "found a list; expected one text"),
        (Node.text, "{x: y}", "found a map of keys; expected one text"),
        (Node.items, "x", "found x; expected a list such as [a, b]"),
        (Node.entries, "[x]", "found a list; expected a map such as {key: value}"),
        (Node.map, "x", "found x; expected a map such as {key: value}"),
    ],
)
def test_wrong_shapes(read, said, message):
    with pytest.raises(InputError) as caught:
        read(root(f"\na: {said}").need("a"))
    assert str(caught.value) == f"f.yaml:2: `a` has the wrong shape; {message}"


# maps with known keys


def test_unknown_keys_name_their_line_and_the_closest_key():
    entries = root("a: 1\ninner:\n  suply: 2\n").need("inner").map()
    assert (entries.take("supply"), entries.take("environment")) == (None, None)
    with pytest.raises(InputError) as caught:
        entries.done()
    assert str(caught.value) == "f.yaml:3: unknown key `suply` in `inner`; did you mean `supply`?"


def test_unknown_keys_without_a_close_one_list_what_is_accepted():
    entries = root("zzz: 1")
    entries.take("supply")
    with pytest.raises(InputError) as caught:
        entries.done(also=["schema"])
    assert str(caught.value) == "f.yaml:1: unknown key `zzz`; expected supply or schema"


def test_an_unknown_key_is_an_error_even_without_a_value():
    with pytest.raises(InputError, match="unknown key `x`"):
        root("x:").done()


def test_a_missing_key_names_the_one_it_may_stand_under():
    with pytest.raises(InputError) as caught:
        root("a: {betwen: 1}").need("a").map().need("between", "between: [a, b]")
    assert str(caught.value) == "f.yaml:1: `a` lacks the key `between`; is it meant by `betwen`?; expected between: [a, b]"


def test_rest_and_over():
    high, low = root("a: 1\nb: 2"), load(Blob("low.yaml", b"b: 3\nc: 4\nd: 5"))
    low.take("d")
    both = high.over(low)
    assert [(key.name, value.text(), value.path) for key, value in both.rest()] == [
        ("a", "1", "f.yaml"),
        ("b", "2", "f.yaml"),
        ("c", "4", "low.yaml"),
    ]
    both.done()
    with pytest.raises(InputError, match=r"low\.yaml:1: unknown key `b`"):
        low.done()
    assert "a" in high
    assert "d" not in low


def test_schema():
    blob = Blob("f.yaml", b"schema: withstand-x/1\na: 1")
    entries = load(blob, "withstand-x/1")
    assert entries.need("a").text() == "1"
    entries.done()
    assert load(Blob("f.yaml", b"a: 1"), "withstand-x/1").need("a").text() == "1"
    with pytest.raises(
        InputError, match=r"f\.yaml:1: `schema` names another kind of file; found withstand-x/1; expected withstand-y/1"
    ):
        load(blob, "withstand-y/1")
    with pytest.raises(InputError, match="does not say what it is; found no key `schema`; expected schema: withstand-x/1"):
        load(Blob("f.yaml", b"a: 1"), "withstand-x/1", required=True)


def test_words():
    assert [either("I"), either(("I", "II")), either(("I", "II", "III"))] == ["I", "I or II", "I, II or III"]
    assert suggestion("Suply", ["supply", "rails"]) == "; did you mean `supply`?"
    assert suggestion("zzz", ["supply"]) == suggestion("x", []) == ""


def test_messages_are_neutral():
    with pytest.raises(InputError) as caught:
        root('"a\\e[31m\\u202e": 1').done()
    assert str(caught.value) == "f.yaml:1: unknown key `a\\x1b[31m\\u202e`"
