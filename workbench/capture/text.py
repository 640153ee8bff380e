"""Text from the bench: encodings, separators, numbers, and header cells with a unit."""

from __future__ import annotations

import csv
import re

SEPARATORS = (",", ";", "\t")

_HEADER = re.compile(r"^(?P<name>.*?)\s*(?:[\[(]\s*(?P<unit>[^\[\]()]*?)\s*[\])])?$", re.DOTALL)
_NUMBER = re.compile(r"[-+]?(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?")
_NOT_TEXT = re.compile("[\x00-\x08\x0e-\x1a\x1c-\x1f]")
_LOOK = 16_384


def decode(data: bytes) -> str | None:
    """The text of a file in UTF-8, UTF-16 (with or without a byte order mark) or Latin-1.

    Returns None where the bytes are no text, so that the caller can say of which file.

    Examples
    --------
    >>> decode("µV".encode("latin-1")), decode("µV".encode("utf-16")), decode(b"\\x00\\x01\\x02")
    ('µV', 'µV', None)
    """
    for encoding in _likely(data):
        try:
            text = data.decode(encoding)
        except UnicodeDecodeError:
            continue
        if not _NOT_TEXT.search(text, 0, _LOOK):
            return text
    return None


def _likely(data: bytes) -> tuple[str, ...]:
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        return ("utf-16",)
    head = data[:_LOOK]
    # Digits and separators have their zero byte at one parity only; a stray one makes no UTF-16.
    odd, even = head[1::2].count(0), head[::2].count(0)
    if max(odd, even) > len(head) / 8:
        return ("utf-16-le",) if odd > even else ("utf-16-be",)
    return ("utf-8-sig", "latin-1")


def split_header(cell: str) -> tuple[str, str | None]:
    """Name and unit of a header cell; None where there is no bracket.

    Examples
    --------
    >>> split_header(" frequency [Hz] "), split_header("CH1 (mV)"), split_header("remark")
    (('frequency', 'Hz'), ('CH1', 'mV'), ('remark', None))
    """
    match = _HEADER.match(cell.strip())
    if match is None or not match["name"]:
        return cell.strip(), None
    return match["name"], match["unit"]


def plain_number(text: str, decimal: str = ".") -> float | None:
    """A number as people print it, or None.  Words such as ``nan`` are none; ``1e999`` is infinite.

    Examples
    --------
    >>> plain_number(" 1,5e3 ", ","), plain_number("1.5", ","), plain_number("fifty")
    (1500.0, None, None)
    """
    trimmed = text.strip()
    if decimal != ".":
        if "." in trimmed:
            return None
        trimmed = trimmed.replace(decimal, ".")
    return float(trimmed) if _NUMBER.fullmatch(trimmed) else None


def split_cells(line: str, separator: str) -> tuple[str, ...]:
    """The cells of one line, quotes taken off, blanks trimmed.

    Examples
    --------
    >>> split_cells('"a;b"; c ;', ";")
    ('a;b', 'c', '')
    """
    try:
        rows = list(csv.reader([line], delimiter=separator, skipinitialspace=True))
    except csv.Error:  # a cell of more than 128 KB
        rows = [line.split(separator)]
    return tuple(cell.strip() for cell in rows[0]) if rows else ()


COMMENTS = ("#", "%", "!", "//")


def is_remark(line: str) -> bool:
    """Whether a line holds nothing but a remark, or nothing.

    Examples
    --------
    >>> is_remark("# by hand"), is_remark("  "), is_remark("1;2")
    (True, True, False)
    """
    trimmed = line.strip()
    return not trimmed or trimmed.startswith(COMMENTS)


def printed_digit(text: str, decimal: str = ".") -> float | None:
    """What one unit of the last printed digit is worth, or None where the text is no number.

    Examples
    --------
    >>> printed_digit("1.250E-03"), printed_digit("12"), printed_digit("0,05", ",")
    (1e-06, 1.0, 0.01)
    """
    if plain_number(text, decimal) is None:
        return None
    mantissa, _, exponent = text.strip().lower().partition("e")
    decimals = len(mantissa.partition(decimal)[2])
    return float(f"1e{int(exponent or 0) - decimals}")


def split_lines(text: str) -> list[str]:
    """The lines of a text, whatever the line ending.  (`str.splitlines` also splits at form feeds.)

    Examples
    --------
    >>> split_lines("a\\r\\nb\\rc")
    ['a', 'b', 'c']
    """
    return text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
