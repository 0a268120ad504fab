"""YAML text to plain data with the place of every value, and back.

The dialect is the core schema of YAML 1.2.2 (https://yaml.org/spec/1.2.2/, section 10.3.2) read
with PyYAML's parser: ``1e6`` is a number, ``NO``, ``off``, ``1:30`` and ``2024-01-01`` are texts,
``010`` is ten. Hexadecimal and octal numbers are left out: they are texts. Added is the merge key
``<<``. A key given twice is a fault, and so is every tag that is not of that schema: no text can
make Python do anything. Sizes, depth and aliases are bounded, so that no text can take the machine
either.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import Any

import yaml
from yaml.nodes import MappingNode, Node, ScalarNode, SequenceNode

from optim.errors import Fault, StudyError
from optim.study.units import legible, shown

Path = tuple[str | int, ...]
Place = tuple[int, int]

MOST_BYTES = 1 << 19
"""A study holds at most this much text; the largest baseline that is accepted fits in."""

MOST_ALIASES = 100
"""Aliases ``*name`` in one text; more is no study."""

MOST_VALUES = 5_000
"""Values in one text, aliases and merged keys counted as often as they are used; a large study has
a few hundred, and a text of this many is read in half a second."""

DEEPEST = 20
"""Levels of nesting; a study needs five."""

_TAG = "tag:yaml.org,2002:"
_MERGE = f"{_TAG}merge"
_CORE_SCHEMA = (
    ("null", re.compile(r"~|null|Null|NULL|"), ["~", "n", "N", ""]),
    ("bool", re.compile(r"true|True|TRUE|false|False|FALSE"), list("tTfF")),
    ("int", re.compile(r"[-+]?[0-9]+"), list("-+0123456789")),
    (
        "float",
        re.compile(
            r"[-+]?(?:\.[0-9]+|[0-9]+(?:\.[0-9]*)?)(?:[eE][-+]?[0-9]+)?"
            r"|[-+]?\.(?:inf|Inf|INF)|\.(?:nan|NaN|NAN)"
        ),
        list("-+.0123456789"),
    ),
    ("merge", re.compile(r"<<"), ["<"]),
)


def _resolvers() -> dict[str, list[tuple[str, re.Pattern[str]]]]:
    """First character -> (tag, pattern); PyYAML takes the first that matches."""
    table: dict[str, list[tuple[str, re.Pattern[str]]]] = {}
    for name, pattern, firsts in _CORE_SCHEMA:
        for first in firsts:
            whole = re.compile(f"(?:{pattern.pattern})$")
            table.setdefault(first, []).append((_TAG + name, whole))
    return table


class _StudyLoader(yaml.SafeLoader):
    """PyYAML's parser and composer with our scalars, and with bounds."""

    yaml_implicit_resolvers = _resolvers()

    def __init__(self, text: str) -> None:
        super().__init__(text)
        self.depth = 0
        self.aliases = 0
        self.nodes = 0

    def compose_node(self, parent: Node | None, index: int) -> Node | None:
        """Compose one node unless the text is nested too deeply or repeats itself too often."""
        if self.check_event(yaml.AliasEvent):
            self.aliases += 1
        self.nodes += 1
        self.check_bound(self.aliases, MOST_ALIASES, "aliases")
        self.check_bound(self.depth, DEEPEST, "levels of nesting")
        self.check_bound(self.nodes, 2 * MOST_VALUES, "keys and values")
        self.depth += 1
        node = super().compose_node(parent, index)
        self.depth -= 1
        return node

    def check_bound(self, found: int, most: int, what: str) -> None:
        """Stop where the text goes beyond a bound."""
        if found > most:
            mark = self.peek_event().start_mark  # type: ignore[no-untyped-call]
            raise yaml.composer.ComposerError(None, None, f"more than {most} {what}", mark)


class _StudyDumper(yaml.SafeDumper):
    """PyYAML's writer; it quotes what our reader would not read as the same text."""

    yaml_implicit_resolvers = _resolvers()

    def ignore_aliases(self, data: object) -> bool:  # noqa: ARG002  PyYAML passes it
        """Write everything out: two equal blocks are no alias of each other."""
        return True


def _represent_text(dumper: yaml.SafeDumper, text: str) -> ScalarNode:
    return dumper.represent_scalar(f"{_TAG}str", text, style="|" if "\n" in text else None)


def _represent_float(dumper: yaml.SafeDumper, number: float) -> ScalarNode:
    return dumper.represent_scalar(f"{_TAG}float", repr(number))


_StudyDumper.add_representer(str, _represent_text)
_StudyDumper.add_representer(float, _represent_float)


def dump(data: dict[str, Any]) -> str:
    """Return plain data as YAML; innermost mappings and lists stand on one line.

    Parameters
    ----------
    data : dict
        Texts, finite numbers, booleans, lists and dicts with text keys.
    """
    text: str = yaml.dump(
        data, Dumper=_StudyDumper, sort_keys=False, default_flow_style=None, width=98,
        allow_unicode=True,
    )  # fmt: skip
    return text


@dataclass
class Places:
    """Where everything stands in a text, as (line, column) from 1.

    Attributes
    ----------
    values : dict
        Path -> place of the value; of a block under a key, that of the key.
    keys : dict
        Path -> place of the key that holds the value; of an item of a list, of the item.
    """

    values: dict[Path, Place] = field(default_factory=dict)
    keys: dict[Path, Place] = field(default_factory=dict)

    def of(self, path: Path) -> Place | None:
        """Return the place of a value, or else of the key of the nearest block around it."""
        if path in self.values:
            return self.values[path]
        around = (path[:length] for length in range(len(path) - 1, -1, -1))
        return next((self.keys[block] for block in around if block in self.keys), None)


@dataclass
class Tree:
    """What a YAML text holds.

    Attributes
    ----------
    data : object
        Dicts with text keys, lists, texts, numbers, booleans.
    places : Places
        Where each value stands.
    faults : list of Fault
        What is wrong with the text as YAML.
    unread : set
        Paths of values that could not be read, None in `data`.
    """

    data: Any = None
    places: Places = field(default_factory=Places)
    faults: list[Fault] = field(default_factory=list)
    unread: set[Path] = field(default_factory=set)


def parse(text: str, file: str) -> Tree:
    """Return what a YAML text holds.

    Parameters
    ----------
    text : str
        The text.
    file : str
        What it is called in faults.

    Raises
    ------
    StudyError
        If the text is not YAML at all, or beyond the bounds of this module.
    """
    try:
        loader = _StudyLoader(text)
        node = loader.get_single_node()
    except yaml.reader.ReaderError as error:
        raise StudyError([_unreadable(error, text, file)]) from error
    except yaml.MarkedYAMLError as error:
        raise StudyError([_not_yaml(error, file)]) from error
    if node is None:
        raise StudyError([Fault("the file is empty; accepted is a study in YAML.", file=file)])
    walk = _Walk(file)
    walk.tree.data = walk.value(node, (), ())
    return walk.tree


def _unreadable(error: yaml.reader.ReaderError, text: str, file: str) -> Fault:
    before = text[: error.position]
    line, column = before.count("\n") + 1, len(before) - before.rfind("\n")
    code = error.character if isinstance(error.character, int) else ord(error.character)
    return Fault(
        f"the character U+{code:04X} is not accepted in a study; remove it.",
        (), file, line, column,
    )  # fmt: skip


def _not_yaml(error: yaml.MarkedYAMLError, file: str) -> Fault:
    """One line for PyYAML's two sentences and two places."""
    mark = error.problem_mark or error.context_mark
    problem = " ".join(str(error.problem or error.context).split())
    if "'\\t'" in problem:
        problem = "a tab stands where spaces are needed; indent with spaces"
    context = error.context_mark
    if context is not None and mark is not None and context.line != mark.line:
        problem += f" ({error.context} at line {context.line + 1})"
    place = (mark.line + 1, mark.column + 1) if mark is not None else (None, None)
    return Fault(f"this is not YAML: {problem}.", (), file, *place)


def fault_at(path: Path, message: str, file: str, place: Place | None) -> Fault:
    """Return a fault whose sentence starts with the dotted path of what it is about."""
    dotted = ".".join(legible(str(step)) for step in path)
    line, column = place or (None, None)
    return Fault(f"{dotted}: {message}" if dotted else message, path, file, line, column)


def _start(node: Node) -> Place:
    return node.start_mark.line + 1, node.start_mark.column + 1


class _Walk:
    """One walk over the nodes of a text."""

    def __init__(self, file: str) -> None:
        self.tree = Tree()
        self.file = file
        self.values = 0

    def fault(self, message: str, node: Node, path: Path) -> None:
        """Note what is wrong at a node."""
        self.tree.faults.append(fault_at(path, message, self.file, _start(node)))

    def unread(self, message: str, node: Node, path: Path) -> None:
        """Note that a value could not be read."""
        self.fault(message, node, path)
        self.tree.unread.add(path)

    def count(self, node: Node) -> None:
        """Count what is looked at, be it new or not, and stop where that is too much.

        Merged mappings that merge each other twice hold few keys and take for ever.
        """
        self.values += 1
        if self.values > MOST_VALUES:
            message = f"the text holds more than {MOST_VALUES} values; that is no study."
            raise StudyError([Fault(message, (), self.file, *_start(node))])

    def value(self, node: Node, path: Path, above: tuple[Node, ...]) -> Any:  # noqa: ANN401
        """Return the value of a node; `above` are the nodes that hold it."""
        self.count(node)
        key = self.tree.places.keys.setdefault(path, _start(node))
        self.tree.places.values[path] = _start(node) if isinstance(node, ScalarNode) else key
        if node in above:
            self.unread("this block holds itself; write its content out.", node, path)
            return None
        if isinstance(node, ScalarNode):
            return self.scalar(node, path)
        if node.tag not in (f"{_TAG}map", f"{_TAG}seq"):
            self.unread(_refusal(node), node, path)
            return None
        if isinstance(node, SequenceNode):
            return [
                self.value(item, (*path, index), (*above, node))
                for index, item in enumerate(node.value)
            ]
        return self.mapping(node, path, (*above, node))

    def mapping(self, node: Node, path: Path, above: tuple[Node, ...]) -> dict[str, Any]:
        """Return a mapping; a key given twice is a fault, merged keys stand back."""
        data: dict[str, Any] = {}
        first: dict[str, Node] = {}
        for key, value in node.value:
            if key.tag == _MERGE:
                continue
            name = self.key(key, path)
            if name is None:
                continue
            if name in first:
                line, _ = _start(first[name])
                message = f"the key is given twice, first at line {line}; keep one of the two."
                self.fault(message, key, (*path, name))
                continue
            first[name] = key
            self.tree.places.keys[*path, name] = _start(key)
            data[name] = self.value(value, (*path, name), above)
        for key, value in node.value:
            if key.tag == _MERGE:
                self.merge(value, data, path, above)
        return data

    def merge(
        self, source: Node, data: dict[str, Any], path: Path, above: tuple[Node, ...]
    ) -> None:
        """Add the keys of merged mappings that `data` does not have."""
        for node in source.value if isinstance(source, SequenceNode) else [source]:
            if not isinstance(node, MappingNode) or node in above:
                self.fault("<< merges mappings of keys such as *name only.", node, path)
                continue
            for key, value in node.value:
                self.count(key)
                if key.tag == _MERGE:
                    self.merge(value, data, path, (*above, node))
                elif isinstance(key, ScalarNode) and key.value not in data:
                    self.tree.places.keys[*path, key.value] = _start(key)
                    data[key.value] = self.value(value, (*path, key.value), (*above, node))

    def key(self, node: Node, path: Path) -> str | None:
        """Return a key as the text it is written as."""
        if isinstance(node, ScalarNode) and node.value:
            return str(node.value)
        self.fault("a key is a text, such as chord: 212 mm.", node, path)
        return None

    def scalar(self, node: ScalarNode, path: Path) -> Any:  # noqa: ANN401
        """Return a text, number or boolean."""
        kind, text = node.tag.removeprefix(_TAG), str(node.value)
        if kind in {"str", "merge"}:
            return text
        if kind == "bool" and text.lower() in {"true", "false"}:
            return text.lower() == "true"
        if kind in {"int", "float"}:
            return self.number(node, kind, path)
        nothing = "no value is given; give one, or leave the key out."
        self.unread(nothing if kind == "null" else _refusal(node), node, path)
        return None

    def number(self, node: ScalarNode, kind: str, path: Path) -> float | None:
        """Return a whole number as int, any other as float."""
        text = re.sub(r"\.(?=inf|nan)", "", str(node.value).lower())
        try:
            return int(text) if kind == "int" and len(text) <= 20 else float(text)
        except ValueError:
            self.unread(f"{shown(text)} is no number.", node, path)
            return None


def _refusal(node: Node) -> str:
    tag = str(node.tag).replace(_TAG, "!!")
    return (
        f"the tag {shown(tag)} is refused; "
        "a study holds texts, numbers, true, false, lists and mappings only."
    )
