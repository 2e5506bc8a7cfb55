"""The make-up of a compound tide, written as a sum such as ``2*M2 + S2``."""

from __future__ import annotations

import re

from tidekit.errors import ConstituentError

_TERM = re.compile(r"\s*([+-]?)\s*(?:(\d+)\s*\*\s*)?([A-Za-z0-9()]+)\s*")


def parse_makeup(text: str) -> tuple[tuple[str, int], ...]:
    """Read a sum of constituents.

    Parameters
    ----------
    text : str
        Terms joined by ``+`` or ``-``, each a constituent with an optional whole factor before ``*``.

    Returns
    -------
    tuple of (str, int)
        Constituent and signed factor of each term, in the order written.

    Raises
    ------
    ConstituentError
        If the text is not such a sum.

    Examples
    --------
    >>> parse_makeup("2*M2 + S2 - N2")
    (('M2', 2), ('S2', 1), ('N2', -1))
    """
    terms: list[tuple[str, int]] = []
    position = 0
    while position < len(text):
        match = _TERM.match(text, position)
        if match is None or (terms and not match[1]):
            message = f"cannot read {text!r} as a sum of constituents; write it like 2*M2 + S2"
            raise ConstituentError(message)
        sign, factor, name = match.groups()
        terms.append((name, (-1 if sign == "-" else 1) * int(factor or 1)))
        position = match.end()
    if not terms:
        message = "an empty make-up; write it like 2*M2 + S2"
        raise ConstituentError(message)
    return tuple(terms)


def format_makeup(parts: tuple[tuple[str, int], ...]) -> str:
    """Write parts as a sum, the reverse of `parse_makeup`.

    Examples
    --------
    >>> format_makeup((("M2", 2), ("S2", 1), ("N2", -1)))
    '2*M2 + S2 - N2'
    """
    pieces: list[str] = []
    for name, factor in parts:
        sign = "- " if factor < 0 else "+ " if pieces else ""
        pieces.append(f"{sign}{f'{abs(factor)}*' if abs(factor) != 1 else ''}{name}")
    return " ".join(pieces)
