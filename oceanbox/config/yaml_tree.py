"""YAML text to a tree that knows the file and line of every value.

Scalars follow the YAML 1.2 core schema (YAML 1.2.2 specification, section 10.3.2): `1e-7` is a number,
`010` is ten, and `on`, `no` and `12:30` are text. Duplicate keys, tags and keys that are not text are faults.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any

import yaml

from oceanbox.errors import Fault

Scalar = str | int | float | bool | None

# pairs of tag, pattern, first characters, in the order of the specification's table
CORE_SCHEMA: tuple[tuple[str, str, list[str]], ...] = (
    ("tag:yaml.org,2002:null", r"^(?:~|null|Null|NULL|)$", ["~", "n", "N", ""]),
    ("tag:yaml.org,2002:bool", r"^(?:true|True|TRUE|false|False|FALSE)$", list("tTfF")),
    ("tag:yaml.org,2002:int", r"^(?:[-+]?[0-9]+|0o[0-7]+|0x[0-9a-fA-F]+)$", list("-+0123456789")),
    (
        "tag:yaml.org,2002:float",
        r"^(?:[-+]?(?:\.[0-9]+|[0-9]+(?:\.[0-9]*)?)(?:[eE][-+]?[0-9]+)?"
        r"|[-+]?\.(?:inf|Inf|INF)|\.(?:nan|NaN|NAN))$",
        list("-+.0123456789"),
    ),
)


class CoreLoader(yaml.SafeLoader):
    """Composes nodes whose scalars are resolved by the YAML 1.2 core schema."""

    yaml_implicit_resolvers: dict[str, list[tuple[str, re.Pattern[str]]]] = {}  # noqa: RUF012  (as the base declares it)


class CoreDumper(yaml.SafeDumper):
    """Writes scalars so that the YAML 1.2 core schema reads them back as they were."""

    yaml_implicit_resolvers: dict[str, list[tuple[str, re.Pattern[str]]]] = {}  # noqa: RUF012  (as the base declares it)


for _tag, _pattern, _first in CORE_SCHEMA:
    CoreLoader.add_implicit_resolver(_tag, re.compile(_pattern), _first)
    CoreDumper.add_implicit_resolver(_tag, re.compile(_pattern), _first)


@dataclass(frozen=True)
class Node:
    """A value and where it stands: a scalar, a list of nodes, or a mapping from key to node.

    location    'file:line' of the key that holds the value, of the item, or of the start of the file
    """

    value: Scalar | list[Node] | dict[str, Node]
    location: str


def plain(node: Node) -> Any:
    """The tree as nested mappings, lists and scalars."""
    if isinstance(node.value, dict):
        return {key: plain(child) for key, child in node.value.items()}
    if isinstance(node.value, list):
        return [plain(child) for child in node.value]
    return node.value


def read_tree(text: str, file: str, faults: list[Fault]) -> Node | None:
    """Parse one YAML document; what is wrong with it as YAML is appended to `faults`.

    file    name used in locations

    Returns the tree, without the entries that are at fault; None where the text cannot be read at all.
    """
    empty = Node({}, f"{file}:1")
    try:
        root = yaml.compose(text, Loader=CoreLoader)
    except yaml.YAMLError as error:
        faults.append(_syntax_fault(error, file))
        return None
    except RecursionError:
        faults.append(
            Fault(empty.location, "", "nesting without end", "a configuration is a few levels deep", "flatten it")
        )
        return None
    if root is None:
        return empty
    if not isinstance(root, yaml.MappingNode):
        faults.append(
            Fault(empty.location, "", "no mapping", "a configuration is a mapping", "write 'key: value' lines")
        )
        return None
    return _Reader(file, faults).node(root, (), empty.location)


def _syntax_fault(error: yaml.YAMLError, file: str) -> Fault:
    mark = getattr(error, "problem_mark", None) or getattr(error, "context_mark", None)
    line = mark.line + 1 if mark is not None else 1
    problem = str(getattr(error, "problem", None) or getattr(error, "reason", None) or error)
    column = f" (column {mark.column + 1})" if mark is not None else ""
    return Fault(
        f"{file}:{line}",
        "",
        f"a syntax error: {problem.removeprefix('but ')}{column}",
        "the file must be one YAML document",
        "mend this line or the one before it: indentation by spaces, brackets, quotes, a missing ': '",
    )


class _Reader:
    """Turns the nodes of one document into a tree, noting faults as it goes."""

    def __init__(self, file: str, faults: list[Fault]) -> None:
        self.file = file
        self.faults = faults
        self.open_nodes: set[int] = set()

    def node(self, source: yaml.Node, path: tuple[str, ...], location: str) -> Node:
        """The tree of one node; `path` is its dotted key in parts."""
        if id(source) in self.open_nodes:
            self._fault(source, path, "an alias of itself", "values must be finite", "write the value out")
            return Node(None, location)
        self.open_nodes.add(id(source))
        try:
            if isinstance(source, yaml.MappingNode):
                return Node(self._mapping(source, path), location)
            if isinstance(source, yaml.SequenceNode):
                items = [self.node(item, (*path, str(i)), self._at(item)) for i, item in enumerate(source.value)]
                return Node(items, location)
            return Node(self._scalar(source, path), location)
        finally:
            self.open_nodes.discard(id(source))

    def _at(self, source: yaml.Node) -> str:
        return f"{self.file}:{source.start_mark.line + 1}"

    def _fault(self, source: yaml.Node, path: tuple[str, ...], got: str, allowed: str, remedy: str) -> None:
        self.faults.append(Fault(self._at(source), ".".join(path), got, allowed, remedy))

    def _mapping(self, source: yaml.MappingNode, path: tuple[str, ...]) -> dict[str, Node]:
        children: dict[str, Node] = {}
        for key_node, value_node in source.value:
            key = self._scalar(key_node, path) if isinstance(key_node, yaml.ScalarNode) else None
            if not isinstance(key, str):
                got = (
                    f"the key {key_node.value!r:.40}"
                    if isinstance(key_node, yaml.ScalarNode)
                    else "a list or mapping as key"
                )
                self._fault(key_node, path, got, "keys must be text", "rename or quote this key")
                continue
            if key in children:
                self._fault(
                    key_node,
                    (*path, key),
                    "the key a second time",
                    f"each key once (first at {children[key].location})",
                    "remove one of the two",
                )
                continue
            children[key] = self.node(value_node, (*path, key), self._at(key_node))
        return children

    def _scalar(self, source: yaml.Node, path: tuple[str, ...]) -> Scalar:
        """The value of a scalar; its text where an explicit tag does not fit."""
        text = str(source.value)
        try:
            return _scalar_value(source.tag.removeprefix("tag:yaml.org,2002:"), text)
        except ValueError:
            self._fault(source, path, f"{text!r:.40} with the tag {source.tag}", "plain values only", "remove the tag")
            return text


def _scalar_value(tag: str, text: str) -> Scalar:
    """Build a scalar by its tag; raises ValueError where the text does not fit the tag or the tag is unknown."""
    match tag:
        case "str":
            return text
        case "null":
            return None
        case "bool":
            return {"true": True, "false": False}.get(text.lower(), text)
        case "int":
            return int(text, 8 if text.startswith("0o") else 16 if text.startswith("0x") else 10)
        case "float":
            return float(text.lower().replace(".inf", "inf").replace(".nan", "nan"))
    raise ValueError(tag)
