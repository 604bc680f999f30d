"""Files that extend other files: reading the chain and merging it."""

from __future__ import annotations

from difflib import get_close_matches
from pathlib import Path

from oceanbox.config.showing import show
from oceanbox.config.yaml_tree import Node, plain, read_tree
from oceanbox.errors import Fault


def read_extended(path: Path, faults: list[Fault]) -> Node | None:
    """The tree of a file merged over the files it extends; faults are appended, never raised.

    None where the file cannot be read at all.
    """
    text, problem = _read(path)
    if text is None:
        faults.append(Fault("", "", str(path), problem, _near(path)))
        return None
    return extended(text, str(path), path.parent, (path.resolve(),), faults)


def extended(text: str, file: str, folder: Path | None, chain: tuple[Path, ...], faults: list[Fault]) -> Node | None:
    """The tree of a text merged over the files it extends; faults are appended, never raised.

    None where the text cannot be read at all.

    file      name used in locations
    folder    where relative paths in the text start; None where they have no meaning
    chain     files being read, outermost first, so that a circle is noticed
    """
    tree = read_tree(text, file, faults)
    if tree is None:
        return None
    keys = tree.value if isinstance(tree.value, dict) else {}
    own = Node({key: child for key, child in keys.items() if key != "extends"}, tree.location)
    if folder is not None:
        own = _with_absolute_files(own, folder)
    link = keys.get("extends")
    if link is None or link.value is None:
        return own
    base = _base_tree(link, folder, chain, faults)
    if isinstance(base, Fault):
        faults.append(base)
        return own
    return own if base is None else _merged_keys(base, own)


def _base_tree(link: Node, folder: Path | None, chain: tuple[Path, ...], faults: list[Fault]) -> Node | Fault | None:
    """The tree of the file that `extends` names, or why it cannot be had; faults inside it are appended."""

    def refusal(got: str, allowed: str, remedy: str) -> Fault:
        return Fault(link.location, "extends", got, allowed, remedy)

    if not isinstance(link.value, str):
        return refusal(
            show(plain(link)), "must be the path of a YAML file", "write a path that starts at this file's folder"
        )
    if folder is None:
        return refusal(repr(link.value), "this text has no folder for paths to start at", "load it from a file")
    path = folder / link.value
    if path.resolve() in chain:
        circle = " -> ".join(item.name for item in (*chain, path.resolve()))
        return refusal(repr(link.value), f"files may not extend each other in a circle: {circle}", "break the circle")
    text, problem = _read(path)
    if text is None:
        return refusal(repr(link.value), problem, _near(path))
    return extended(text, str(path), path.parent, (*chain, path.resolve()), faults)


def _read(path: Path) -> tuple[str | None, str]:
    """The text of a file, or None and what is wrong with the file."""
    try:
        return path.read_text(encoding="utf-8"), ""
    except FileNotFoundError:
        return None, f"there is no file {path.name} in {path.parent}"
    except UnicodeDecodeError:
        return None, f"{path.name} is not UTF-8 text"
    except OSError as error:
        return None, f"{path.name} cannot be read ({error.strerror})"


def _near(path: Path) -> str:
    """What to do about a path that leads nowhere."""
    names = sorted(item.name for item in path.parent.glob("*.y*ml")) if path.parent.is_dir() else []
    close = get_close_matches(path.name, names, n=1, cutoff=0.6)
    if close and close[0] != path.name:
        return f"did you mean '{close[0]}'?"
    return "give the path of a readable YAML file"


def _with_absolute_files(node: Node, folder: Path) -> Node:
    """The tree with every `file:` of a field made absolute: a relative one starts at the YAML file that names it."""
    if isinstance(node.value, list):
        return Node([_with_absolute_files(child, folder) for child in node.value], node.location)
    if not isinstance(node.value, dict):
        return node
    children = {key: _with_absolute_files(child, folder) for key, child in node.value.items()}
    name = children.get("file")
    if name is not None and isinstance(name.value, str) and name.value:
        children["file"] = Node(str((folder / name.value).resolve()), name.location)
    return Node(children, node.location)


def _merged_keys(base: Node, own: Node) -> Node:
    """A mapping over another: keys of both, mappings merged in turn, everything else replaced."""
    if not isinstance(base.value, dict) or not isinstance(own.value, dict):
        return own
    keys = dict(base.value)
    for key, child in own.value.items():
        keys[key] = _merged(keys[key], child) if key in keys else child
    return Node(keys, own.location)


def _merged(base: Node, own: Node) -> Node:
    """A value over another; a mapping that names another kind of field or rule replaces the old one as a whole."""
    kind = _kind(own)
    return own if kind is not None and kind != _kind(base) else _merged_keys(base, own)


def _kind(node: Node) -> str | None:
    """What kind of field or rule a mapping is, None where it does not say."""
    if not isinstance(node.value, dict):
        return None
    for key in ("shape", "kind"):
        if key in node.value:
            return f"{key} {node.value[key].value}"
    return next((key for key in ("points", "file", "sum") if key in node.value), None)
