"""Tables of a TOML file whose every key is checked: a fault is told with file, key and line."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path
from typing import Any

from tidekit.errors import NetworkFileError

Pairs = tuple[tuple[float, float], ...]


@dataclass(frozen=True)
class KeyedTable:
    """One table of a network file."""

    path: Path
    """The file."""
    where: str
    """The table's name; the n-th [[gauge]] is ``gauge n``."""
    values: Mapping[str, Any]
    """Its keys and values."""
    lines: Mapping[tuple[str, str], int]
    """Line of each key by table and key; of each table itself under key ''."""

    def fail(self, key: str, message: str) -> NetworkFileError:
        """Error at a key, or at the table where the key is empty."""
        line = self.lines.get((self.where, key)) or self.lines.get((self.where, ""))
        name = f"{self.where}.{key}" if key else self.where
        return NetworkFileError(message, path=self.path, line=line, key=name)

    def only(self, keys: Iterable[str]) -> KeyedTable:
        """Give the table itself, after a look for keys that it must not have."""
        for key in self.values:
            if key not in keys:
                message = f"unknown key; wanted one of {', '.join(keys)}"
                raise self.fail(key, message)
        return self

    def text(self, key: str) -> str | None:
        """A text that is not blank, or None where the key is absent."""
        value = self.values.get(key)
        if value is None or (isinstance(value, str) and value.strip()):
            return value
        raise self._wanted(key, "a text")

    def choice(self, key: str, allowed: tuple[str, ...], meaning: str = "") -> str | None:
        """One of some texts."""
        value = self.values.get(key)
        if value is not None and value not in allowed:
            raise self._wanted(key, " or ".join(f'"{word}"' for word in allowed) + meaning)
        return None if value is None else str(value)

    def truth(self, key: str) -> bool | None:
        """A truth value."""
        value = self.values.get(key)
        if value is None or isinstance(value, bool):
            return value
        raise self._wanted(key, "true or false")

    def items(self, key: str) -> list[Any]:
        """A list; empty where the key is absent."""
        value = self.values.get(key, [])
        if isinstance(value, list):
            return value
        raise self._wanted(key, "a list")

    def number(self, key: str, low: float, high: float, unit: str = "") -> float | None:
        """A number between two limits."""
        value = self.values.get(key)
        if value is None:
            return None
        if isinstance(value, bool) or not isinstance(value, (int, float)):
            raise self._wanted(key, "a number")
        if not low <= value <= high:
            message = f"is {value:g}; wanted {low:g} to {high:g} {unit}".rstrip()
            raise self.fail(key, message)
        return float(value)

    def pairs(self, key: str, check: Callable[[float, float], bool], wanted: str, *, ordered: bool = True) -> Pairs:
        """At least two pairs of numbers, the first of each increasing where `ordered`; empty where absent."""
        found = self.items(key)
        for pair in found:
            sound = isinstance(pair, list) and len(pair) == 2 and all(type(v) in (int, float) for v in pair)
            if not sound or not check(float(pair[0]), float(pair[1])):
                message = f"holds {pair!r}; wanted {wanted}"
                raise self.fail(key, message)
        values = tuple((float(a), float(b)) for a, b in found)
        if len(values) == 1:
            message = "has one entry; wanted two or more"
            raise self.fail(key, message)
        if ordered and any(b[0] <= a[0] for a, b in pairwise(values)):
            message = "distances do not increase; put them in order"
            raise self.fail(key, message)
        return values

    def file(self, key: str) -> Path | None:
        """A file that exists, relative to the network file."""
        name = self.text(key)
        if name is None:
            return None
        path = self.path.parent / name
        if not path.is_file():
            message = f"no file {name!r} (looked in {self.path.parent}); check the path"
            raise self.fail(key, message)
        return path

    def _wanted(self, key: str, wanted: str) -> NetworkFileError:
        value = self.values.get(key)
        return self.fail(key, f"is {value!r}; wanted {wanted}")


@dataclass(frozen=True)
class KeyedFile:
    """A TOML file, and the line of each of its keys."""

    path: Path
    """The file."""
    tables: Mapping[str, Any]
    """What it holds."""
    lines: Mapping[tuple[str, str], int]
    """As in `KeyedTable`."""

    def table(self, name: str) -> KeyedTable:
        """A table by name; an empty one where the file has none."""
        return self.view(name, self.tables.get(name, {}))

    def view(self, where: str, values: object) -> KeyedTable:
        """Values seen as a table."""
        if isinstance(values, dict):
            return KeyedTable(self.path, where, values, self.lines)
        message = "is no table; write it as [table] or [[gauge]]"
        whole_table = ""
        raise KeyedTable(self.path, where, {}, self.lines).fail(whole_table, message)


def read_keys(path: Path) -> KeyedFile:
    """Read a TOML file and find the line of each key.

    Raises
    ------
    NetworkFileError
        If the file is missing or is not TOML.
    """
    try:
        text = path.read_text(encoding="utf-8")
        return KeyedFile(path, tomllib.loads(text), _key_lines(text))
    except (OSError, UnicodeDecodeError) as error:
        message = f"cannot read this network file ({getattr(error, 'strerror', None) or 'not UTF-8'}); check the path"
        raise NetworkFileError(message, path=path) from error
    except tomllib.TOMLDecodeError as error:
        found = re.search(r"line (\d+)", str(error))
        message = f"not TOML: {error}"
        raise NetworkFileError(message, path=path, line=int(found[1]) if found else None) from error


def _key_lines(text: str) -> dict[tuple[str, str], int]:
    """Line of each key, by table and key; of each table itself under key ''."""
    lines: dict[tuple[str, str], int] = {}
    where, count = "", 0
    for number, line in enumerate(text.splitlines(), 1):
        table = re.match(r"\s*\[{1,2}\s*([A-Za-z0-9_-]+)\s*\]{1,2}", line)
        key = re.match(r"\s*([A-Za-z0-9_-]+)\s*=", line)
        if table and "=" not in line.split("#")[0]:
            count += table[1] == "gauge"
            where = f"gauge {count}" if table[1] == "gauge" else table[1]
            lines.setdefault((where, ""), number)
        elif key:
            lines.setdefault((where, key[1]), number)
            if not where:  # a key before any table: TOML's top level
                lines.setdefault((key[1], ""), number)
    return lines
