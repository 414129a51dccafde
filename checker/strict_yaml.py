"""The YAML that Withstand accepts: maps, lists and text, each value knowing its line.

Everything stays text until the field that holds it says what it should be, so `no`, `1_000`, `012` and `12:30` mean
what they look like. Anchors, aliases, tags, merge keys, second documents, repeated keys, keys that are not text, deep
nesting and huge documents are refused. Every complaint is an InputError with file, line, key, found and expected.

    root = load(blob, "withstand-declaration/1")      # a Map; an empty file is an empty Map
    supply = root.take("supply")                      # Node, or None when the key is absent or empty
    if supply is not None:
        keys = supply.map()
        phases = keys.take("phases")
        count = None if phases is None else phases.whole(1, 3)
        keys.done()                                   # raises for a key nobody took, with a suggestion
    for key, value in parts.entries():                # a map with free keys; `key` is a Node too: key.name()
        ...
    raise node.error("cannot be zero", expected="a positive voltage")     # any further complaint, at its place
"""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterable, Iterator
from datetime import date

import yaml

from checker import limits
from checker.errors import InputError
from checker.files import Blob, decoded
from checker.neutral import neutral

_LOADER = getattr(yaml, "CSafeLoader", yaml.SafeLoader)
_QUOTED = ("'", '"', "|", ">")
_NULL = ("", "~", "null", "Null", "NULL")
_UNPRINTABLE = re.compile("[^\t\n\r\x20-\x7e\x85\xa0-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")
_NUMBER = re.compile(r"[+-]?(?:\d{1,30}(?:\.\d{0,30})?|\.\d{1,30})(?:[eE][+-]?\d{1,3})?", re.ASCII)
_WHOLE = re.compile(r"[+-]?\d{1,15}", re.ASCII)
_DATE = re.compile(r"\d{4}-\d{2}-\d{2}", re.ASCII)


class Node:
    """One value of the file. kind: "scalar", "list" or "map". path, line, column (1-based): where it stands.

    name: its key, or `[2]` for the third item of a list. quoted: a scalar in quotes or a block, so that `null` and
    "null" differ. Methods that read a value raise InputError when the value has another shape.
    """

    __slots__ = ("_value", "column", "line", "name", "parent", "path", "quoted")

    def __init__(
        self,
        path: str,
        line: int,
        column: int,
        value: str | list[Node] | dict[str, tuple[Node, Node]],
        *,
        quoted: bool = False,
        parent: Node | None = None,
        name: str = "",
    ):
        self.path, self.line, self.column = path, line, column
        self.quoted, self.parent, self.name = quoted, parent, name
        self._value = value

    @property
    def kind(self) -> str:
        return "scalar" if isinstance(self._value, str) else "list" if isinstance(self._value, list) else "map"

    @property
    def null(self) -> bool:
        """Nothing, `~` or `null` without quotes."""
        return not self.quoted and isinstance(self._value, str) and self._value in _NULL

    @property
    def key(self) -> str:
        """The dotted way from the root, such as `supply.outputs.VOUT` or `barriers[0].grade`; "" for the root."""
        way: list[str] = []
        node: Node | None = self
        while node is not None:
            if node.name:
                way.append(neutral(node.name, limit=40))
            node = node.parent
        return ".".join(reversed(way)).replace(".[", "[")

    def error(self, what: str, *, found: str | None = None, expected: str = "", remedy: str = "") -> InputError:
        """An InputError at this place, to be raised: "`<key>` <what>; found ..., expected ..."."""
        key = self.key
        return InputError(
            self.path,
            f"`{key}` {what}" if key else f"the file {what}",
            line=self.line,
            found=self.shown() if found is None else found,
            expected=expected,
            remedy=remedy,
        )

    def shown(self) -> str:
        """What stands here, for a message."""
        if isinstance(self._value, str):
            return "nothing" if self.null else self._value or '""'
        return "a list" if isinstance(self._value, list) else "a map of keys"

    # scalars

    def text(self, *, limit: int = limits.TOKEN) -> str:
        """The text as written, at most `limit` characters, never empty."""
        if not isinstance(self._value, str):
            raise self.error("has the wrong shape", expected="one text")
        if self.null:
            raise self.error("is empty", found=self._value or "nothing", expected='a text (in quotes when it is meant: "null")')
        if not self._value.strip():
            raise self.error("is empty", expected="a text")
        if len(self._value) > limit:
            raise self.error("is too long", found=f"{len(self._value):,} characters", expected=f"at most {limit:,} characters")
        return self._value

    def name_text(self) -> str:
        """A reference, pin, net or other name: a text of at most limits.NAME characters."""
        return self.text(limit=limits.NAME)

    def flag(self) -> bool:
        """`true` or `false`; yes, no, on, off, 1 and 0 are refused, since they mean different things to different programs."""
        said = self._value if isinstance(self._value, str) else ""
        if said in ("true", "false"):
            return said == "true"
        raise self.error("is neither true nor false", expected="true or false")

    def one_of(self, choices: Iterable[str]) -> str:
        """One of `choices`, upper and lower case alike; returned as spelt in `choices`."""
        accepted, said = tuple(choices), self.text()
        if said in accepted:
            return said
        alike = [choice for choice in accepted if choice.casefold() == said.casefold()]
        if len(alike) == 1:
            return alike[0]
        raise self.error("is none of the accepted words" + suggestion(said, accepted), expected=either(accepted))

    def number(self, *, low: float = float("-inf"), high: float = float("inf")) -> float:
        """A plain number without a unit, in [low, high]; decimal point, exponent allowed; never NaN or infinite."""
        value = float(self.text()) if _NUMBER.fullmatch(self.text()) else None
        if value is None or value in (float("inf"), float("-inf")):
            raise self.error("is not a number", expected="a number such as 0.8")
        if not low <= value <= high:
            raise self.error("is out of range", expected=_bounds(low, high))
        return value

    def whole(self, low: int, high: int) -> int:
        """A whole number in [low, high]."""
        if not _WHOLE.fullmatch(self.text()) or not low <= int(self.text()) <= high:
            raise self.error("is out of range", expected=f"a whole number, {_bounds(low, high)}")
        return int(self.text())

    def date(self) -> str:
        """A day such as 2027-01-31, checked against the calendar; returned as text."""
        said = self.text()
        try:
            return date.fromisoformat(said if _DATE.fullmatch(said) else "").isoformat()
        except ValueError:
            raise self.error("is not a date", expected="a day of the calendar such as 2027-01-31") from None

    # lists and maps

    def items(self) -> tuple[Node, ...]:
        """The items of a list."""
        if not isinstance(self._value, list):
            raise self.error("has the wrong shape", expected="a list such as [a, b]")
        return tuple(self._value)

    def each(self) -> tuple[Node, ...]:
        """The items of a list, or the one scalar itself: for keys that take one or several."""
        if isinstance(self._value, dict):
            raise self.error("has the wrong shape", expected="one text or a list such as [a, b]")
        return (self,) if isinstance(self._value, str) else tuple(self._value)

    def texts(self) -> tuple[str, ...]:
        """One text or a list of texts."""
        return tuple(item.text() for item in self.each())

    def names(self) -> tuple[str, ...]:
        """One name or a list of names (see name_text)."""
        return tuple(item.name_text() for item in self.each())

    def entries(self) -> tuple[tuple[Node, Node], ...]:
        """Key and value of each entry of a map with free keys, in file order."""
        if not isinstance(self._value, dict):
            raise self.error("has the wrong shape", expected="a map such as {key: value}")
        return tuple(self._value.values())

    def map(self) -> Map:
        """The entries of a map with known keys; every call starts afresh."""
        self.entries()
        return Map(self)


class Map:
    """A map whose keys are taken one by one; what is left over at `done` is an error. `node` is where it stands."""

    __slots__ = ("_known", "_left", "node")

    def __init__(self, node: Node):
        self.node = node
        self._left: dict[str, tuple[Node, Node]] = {key.name: (key, value) for key, value in node.entries()}
        self._known: dict[str, None] = {}

    def __contains__(self, key: str) -> bool:
        """Whether the key stands there with a value and was not taken yet."""
        return self.peek(key) is not None

    def peek(self, key: str) -> Node | None:
        """The value of `key` without taking it; None when it is absent, empty or taken already."""
        self._known[key] = None
        entry = self._left.get(key)
        return None if entry is None or entry[1].null else entry[1]

    def take(self, key: str) -> Node | None:
        """The value of `key`, which counts as read from now on; None when it is absent or empty."""
        node = self.peek(key)
        self._left.pop(key, None)
        return node

    def need(self, key: str, expected: str = "") -> Node:
        """The value of `key`, which must be there."""
        node = self.take(key)
        if node is None:
            close = difflib.get_close_matches(key, [name[:60] for name in self._left], n=1, cutoff=0.6)
            meant = f"; is it meant by `{neutral(close[0])}`?" if close else ""
            raise self.node.error(f"lacks the key `{key}`{meant}", found="", expected=expected)
        return node

    def rest(self) -> Iterator[tuple[Node, Node]]:
        """Key and value of every entry not taken so far; they count as read from now on."""
        while self._left:
            yield self._left.pop(next(iter(self._left)))

    def over(self, *lower: Map) -> Map:
        """A fresh map: what is left of this one, and below it the keys of each lower one that are not there yet, whole."""
        both = Map(self.node)
        both._left, both._known = dict(self._left), dict(self._known)
        for other in lower:
            both._left = both._left | {key: entry for key, entry in other._left.items() if key not in both._left}
            both._known |= other._known
        return both

    def done(self, also: Iterable[str] = ()) -> None:
        """Raises InputError for the first key nobody took; `also` are further keys worth suggesting."""
        for name, (key, _) in self._left.items():
            known = tuple(dict.fromkeys((*self._known, *also)))
            place = key.parent.key if key.parent else ""  # of an `over` map, not every key stands in one place
            close = suggestion(name, known)
            raise InputError(
                key.path,
                f"unknown key `{neutral(name, limit=60)}`" + (f" in `{place}`" if place else "") + close,
                line=key.line,
                expected="" if close or not known else either(known),
            )


def either(words: Iterable[str]) -> str:
    """Words as a choice in plain English: "I, II or III"."""
    said = tuple(words)
    return said[0] if len(said) == 1 else ", ".join(said[:-1]) + " or " + said[-1] if said else "nothing"


def _bounds(low: float, high: float) -> str:
    if low == float("-inf"):
        return f"at most {high:g}"
    return f"at least {low:g}" if high == float("inf") else f"from {low:g} to {high:g}"


def suggestion(word: str, choices: Iterable[str]) -> str:
    """`; did you mean "..."?` for the choice closest to `word`, or "" when none is close."""
    folded = {choice.casefold(): choice for choice in choices}
    close = difflib.get_close_matches(word[:60].casefold(), folded, n=1, cutoff=0.7)
    return f"; did you mean `{folded[close[0]]}`?" if close else ""


def load(blob: Blob, schema: str = "", *, required: bool = False) -> Map:
    """The root map of a YAML file; an empty file gives an empty Map.

    schema: the accepted value of the key `schema`, which is taken; required: whether the key must be there. With
    schema "" the key is left alone. Raises InputError.
    """
    root = _root(blob)
    if root.null:
        root = Node(blob.path, 1, 1, {})
    if root.kind != "map":
        raise root.error("has the wrong shape", expected="keys and values such as `key: value`")
    entries = root.map()
    if schema:
        stated = entries.take("schema")
        if stated is None and required:
            raise root.error("does not say what it is", found="no key `schema`", expected=f"schema: {schema}")
        if stated is not None and stated.text() != schema:
            raise stated.error("names another kind of file", expected=schema)
    return entries


def _root(blob: Blob) -> Node:
    text = _text(blob)
    builder = _Builder(blob.path)
    try:
        for event in yaml.parse(text, Loader=_LOADER):
            builder.take(event)
    except yaml.MarkedYAMLError as error:
        raise _unreadable(blob.path, text, error) from None
    except yaml.YAMLError as error:
        raise InputError(blob.path, f"this is not valid YAML ({error})") from None
    return builder.root or Node(blob.path, 1, 1, "")


def _text(blob: Blob) -> str:
    if len(blob.data) > limits.YAML_BYTES:
        raise InputError(
            blob.path,
            "the file is too large",
            found=f"{len(blob.data):,} bytes",
            expected=f"at most {limits.YAML_BYTES:,} bytes of YAML",
        )
    text, note = decoded(blob)
    if "cp1252" in note:  # a wrong guess at the encoding would silently change names, so YAML must be Unicode
        line = _invalid_line(blob.data)
        raise InputError(blob.path, "the text is not valid UTF-8", line=line, expected="YAML in UTF-8", remedy="Save it as UTF-8.")
    unprintable = _UNPRINTABLE.search(text)
    if unprintable:
        line = text.count("\n", 0, unprintable.start()) + 1
        raise InputError(blob.path, f"there is a control character ({unprintable.group()!a}) in the text", line=line)
    return text


def _invalid_line(data: bytes) -> int:
    try:
        data.decode("utf-8")
    except UnicodeDecodeError as error:
        return data.count(b"\n", 0, error.start) + 1
    return 0


def _unreadable(path: str, text: str, error: yaml.MarkedYAMLError) -> InputError:
    mark = error.problem_mark or error.context_mark
    lines = text.splitlines()
    line = min(mark.line + 1, len(lines)) if mark else 0  # what is never closed is noticed behind the last line
    here = lines[line - 1] if 0 < line <= len(lines) else ""
    if "\t" in here[: len(here) - len(here.lstrip())] or (error.problem or "").endswith("'\\t' that cannot start any token"):
        return InputError(path, "there is a tab where only spaces may stand", line=line, remedy="Indent YAML with spaces.")
    reason = error.problem or "unknown reason"
    if error.context and error.context_mark:
        reason = f"{error.context} that starts in line {error.context_mark.line + 1}, {reason}"
    return InputError(path, f"this is not valid YAML: {reason}", line=line)


class _Builder:
    """Builds nodes from parse events one by one, so that a limit is met before the memory is spent."""

    def __init__(self, path: str) -> None:
        self.path = path
        self.root: Node | None = None
        self._open: list[Node] = []
        self._keys: list[Node | None] = []  # per open node: the key that waits for its value
        self._count = 0
        self._documents = 0

    def take(self, event: yaml.Event) -> None:
        if isinstance(event, yaml.AliasEvent):
            raise self._refused(event, f"`*{event.anchor}` refers to another place (an alias)", "Write the value out.")
        if isinstance(event, yaml.DocumentStartEvent):
            self._documents += 1
            if self._documents > 1:
                raise self._refused(event, "a second document starts here", "Keep one document a file.")
            if event.tags:
                raise self._refused(event, "there is a %TAG directive", "Leave tags out.")
        elif isinstance(event, (yaml.MappingEndEvent, yaml.SequenceEndEvent)):
            self._open.pop()
            self._keys.pop()
        elif isinstance(event, yaml.NodeEvent):
            self._node(event)

    def _node(self, event: yaml.NodeEvent) -> None:
        if event.anchor is not None:
            raise self._refused(event, f"`&{event.anchor}` names a value for reuse (an anchor)", "Write the value out.")
        tag = getattr(event, "tag", None)
        if tag is not None:
            raise self._refused(event, f"there is a tag (`{tag}`)", "Leave tags out; every key knows the type of its value.")
        self._count += 1
        if self._count > limits.YAML_NODES:
            raise self._refused(event, f"the file holds more than {limits.YAML_NODES:,} values", "")
        line, column = _position(event)
        node = Node(self.path, line, column, "")
        if isinstance(event, yaml.ScalarEvent):
            if len(event.value) > limits.TOKEN:
                raise self._refused(event, f"a text is longer than {limits.TOKEN:,} characters", "")
            node._value, node.quoted = event.value, event.style in _QUOTED
        else:
            node._value = [] if isinstance(event, yaml.SequenceStartEvent) else {}
        self._place(event, node)
        if not isinstance(event, yaml.ScalarEvent):
            if len(self._open) >= limits.YAML_DEPTH:
                raise self._refused(event, f"values are nested more than {limits.YAML_DEPTH} deep", "")
            self._open.append(node)
            self._keys.append(None)

    def _place(self, event: yaml.NodeEvent, node: Node) -> None:
        if not self._open:
            self.root = node
            return
        parent = node.parent = self._open[-1]
        key = self._keys[-1]
        if isinstance(parent._value, list):
            node.name = f"[{len(parent._value)}]"
            parent._value.append(node)
        elif isinstance(parent._value, dict) and key is None:
            self._keys[-1] = self._checked_key(event, node, parent._value)
        elif isinstance(parent._value, dict) and key is not None:
            node.name = key.name
            parent._value[key.name] = (key, node)
            self._keys[-1] = None

    def _checked_key(self, event: yaml.NodeEvent, node: Node, others: dict[str, tuple[Node, Node]]) -> Node:
        name = node._value
        if not isinstance(name, str):
            raise self._refused(event, "a key is a list or a map", "Keys are plain text.")
        if name == "<<" and not node.quoted:
            raise self._refused(event, "there is a merge key (`<<`)", "Write the keys out.")
        if not name.strip():
            raise self._refused(event, "a key is empty", "")
        if len(name) > limits.NAME:
            raise self._refused(event, f"a key is longer than {limits.NAME:,} characters", "")
        if name in others:
            first = others[name][0].line
            raise self._refused(event, f"the key `{name}` is given twice (first in line {first})", "Keep one of them.")
        node.name, node.quoted = name, True  # a key is text even when it reads `null`
        return node

    def _refused(self, event: yaml.Event, what: str, remedy: str) -> InputError:
        return InputError(self.path, what, line=_position(event)[0], remedy=remedy)


def _position(event: yaml.Event) -> tuple[int, int]:
    mark = event.start_mark
    return (mark.line + 1, mark.column + 1) if mark else (0, 0)
