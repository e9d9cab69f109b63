"""What is done to the bytes of a file: cut, doubled, shuffled, swollen, and filled with what does not belong there."""

import random
import re
from collections.abc import Callable

NUMBER = re.compile(rb"[-+]?\d+\.?\d*(?:[eE][-+]?\d+)?")
LINE = re.compile(rb"[^\n]*\n|[^\n]+\Z")

_SPELLINGS = """nan inf -inf 0 -0.0 -1 1e999 -1e999 1e308 -1e308 1e-320 5e-324 1e30 -1e-30 1_0 0x10 1,5 1.5.1
--1 1e 1e+ . + 1D3 1d-3 True 0b1 1e5e .5 5. 00012 1e0001 99999999999999999999999999999999 1979-05-27 12:00:00 1.#INF
1.#QNAN"""
NUMBERS = _SPELLINGS.split()
NUMBERS += ["9" * 400, "9" * 5000, "0." + "1" * 3000, "1e" + "9" * 50, '""', '"1"', "[]", "{}"]

HOSTILE = [
    "\x1b[31mred",
    "\x1b]0;title\x07",
    "\x1b[2J\x1b[H",
    "\x9b31m",
    "\x07\x08",
    "\u202eevil",
    "\u2066x\u2069",
    "\u2028line",
    "\ufeff",
    "a\nb",
    "a\rb",
    "[bold red]x[/bold red]",
    "[/]",
    "<script>alert(1)</script>",
    "{{ 7 * 7 }}",
    "{0.__class__}",
    "%s%s%n",
    "$(touch pwned)",
    "`touch pwned`",
    "; touch pwned",
    "__import__('os').system('touch pwned')",
    "' OR 1=1 --",
    "=cmd|' /C calc'!A0",
    "../../../../etc/passwd",
    "/etc/passwd",
    "\\\\server\\share",
    "con",
    "nul.txt",
    "x" * 300,
    "é" * 130,
    "👍🏽" * 40,
    "Z\u0351\u036b" * 60,
    "",
    " ",
    ".",
    "..",
    "-rf",
    "--help",
    "~",
    "*",
    "**",
    "?" * 50,
    "[a",
    "[!a-z]*",
    "a\0b",
]
"""Texts that do harm where they are believed."""

Change = Callable[[bytes, random.Random], bytes]


def lines_of(data: bytes) -> list[bytes]:
    return LINE.findall(data)


def cut(data: bytes, rng: random.Random) -> bytes:
    return data[: rng.randrange(len(data) + 1)]


def cut_at_line(data: bytes, rng: random.Random) -> bytes:
    lines = lines_of(data)
    return b"".join(lines[: rng.randrange(len(lines) + 1)])


def double(data: bytes, rng: random.Random) -> bytes:
    return data + data


def double_rows(data: bytes, rng: random.Random) -> bytes:
    return data + b"".join(line for line in lines_of(data) if line[:1].isdigit())


def shuffle(data: bytes, rng: random.Random) -> bytes:
    lines = lines_of(data)
    start = rng.choice([0, 0, 2])
    tail = lines[start:]
    rng.shuffle(tail)
    return b"".join(lines[:start] + tail)


def swap_lines(data: bytes, rng: random.Random) -> bytes:
    lines = lines_of(data)
    if len(lines) > 1:
        a, b = rng.sample(range(len(lines)), 2)
        lines[a], lines[b] = lines[b], lines[a]
    return b"".join(lines)


def drop_line(data: bytes, rng: random.Random) -> bytes:
    lines = lines_of(data)
    if lines:
        del lines[rng.randrange(len(lines))]
    return b"".join(lines)


def repeat_line(data: bytes, rng: random.Random) -> bytes:
    lines = lines_of(data)
    if lines:
        k = rng.randrange(len(lines))
        lines[k:k] = [lines[k]] * rng.choice([1, 1, 3])
    return b"".join(lines)


def _replace_number(data: bytes, rng: random.Random, new: Callable[[bytes], bytes]) -> bytes:
    found = list(NUMBER.finditer(data))
    if not found:
        return data
    one = rng.choice(found)
    return data[: one.start()] + new(one[0]) + data[one.end() :]


def odd_number(data: bytes, rng: random.Random) -> bytes:
    return _replace_number(data, rng, lambda _: rng.choice(NUMBERS).encode())


def negate(data: bytes, rng: random.Random) -> bytes:
    return _replace_number(data, rng, lambda old: b"-" + old.lstrip(b"+-"))


def scale(data: bytes, rng: random.Random) -> bytes:
    factor = rng.choice([1e-9, 1e-3, 0.5, 0.99, 1.01, 2.0, 1e3, 1e9, 1e300])
    return _replace_number(data, rng, lambda old: repr(float(old) * factor).encode())


def change_digit(data: bytes, rng: random.Random) -> bytes:
    places = [k for k, byte in enumerate(data) if 48 <= byte <= 57]
    if not places:
        return data
    k = rng.choice(places)
    return data[:k] + str(rng.randrange(10)).encode() + data[k + 1 :]


def decimal_commas(data: bytes, rng: random.Random) -> bytes:
    return re.sub(rb"(?<=\d)\.(?=\d)", b",", data)


def one_decimal_comma(data: bytes, rng: random.Random) -> bytes:
    return _replace_number(data, rng, lambda old: old.replace(b".", b","))


def random_bytes(data: bytes, rng: random.Random) -> bytes:
    k = rng.randrange(len(data) + 1)
    return data[:k] + rng.randbytes(rng.choice([1, 2, 8, 200])) + data[k + rng.choice([0, 0, 1, 20]) :]


def nothing_but_random(data: bytes, rng: random.Random) -> bytes:
    return rng.randbytes(rng.choice([0, 1, 50, 3000]))


def flip_bits(data: bytes, rng: random.Random) -> bytes:
    changed = bytearray(data)
    for _ in range(rng.choice([1, 3, 20])):
        if changed:
            changed[rng.randrange(len(changed))] ^= 1 << rng.randrange(8)
    return bytes(changed)


def zero_bytes(data: bytes, rng: random.Random) -> bytes:
    k = rng.randrange(len(data) + 1)
    return data[:k] + b"\0" * rng.choice([1, 1, 4096]) + data[k:]


def encoded(data: bytes, rng: random.Random) -> bytes:
    code = rng.choice(["utf-16", "utf-16-le", "utf-16-be", "utf-32", "utf-8-sig", "cp037", "utf-7"])
    return data.decode("latin-1").encode(code, "replace")


def accents(data: bytes, rng: random.Random) -> bytes:
    k = rng.randrange(len(data) + 1)
    return (
        data[:k] + rng.choice([b"\xe9", "é".encode(), b"\x80", b"\xff\xfe", b"\xc2\xa0", b"\xa0"]) + data[k:]
    )


def line_ends(data: bytes, rng: random.Random) -> bytes:
    ends = rng.choice(
        [[b"\r\n"], [b"\r"], [b"\r\n", b"\n", b"\r"], [b"\n\r"], [b"\x0b"], [b"\x0c"], [b"\n\n"]]
    )
    return b"".join(line.rstrip(b"\n") + rng.choice(ends) for line in lines_of(data))


def blanks(data: bytes, rng: random.Random) -> bytes:
    return re.sub(rb" ", rng.choice([b"\t", b"   ", b" \t ", b"\x0b", b"\xc2\xa0", b","]), data)


def comment_bomb(data: bytes, rng: random.Random) -> bytes:
    mark = rng.choice([b"!", b"#", b"! ", b"# x "])
    bomb = (mark + b"\n") * rng.choice([2000, 20000])
    lines = lines_of(data)
    k = rng.randrange(len(lines) + 1)
    return b"".join(lines[:k]) + bomb + b"".join(lines[k:])


def long_comment(data: bytes, rng: random.Random) -> bytes:
    return rng.choice([b"!", b"#"]) + b"x" * rng.choice([5000, 300_000]) + b"\n" + data


def long_line(data: bytes, rng: random.Random) -> bytes:
    unit = rng.choice([b"1 ", b"1,", b"x", b"[", b"a.", b'"', b"{", b"\t", b"1;", b"'"])
    lines = lines_of(data)
    k = rng.randrange(len(lines) + 1)
    return b"".join(lines[:k]) + unit * rng.choice([500, 10_000, 100_000]) + b"\n" + b"".join(lines[k:])


def ten_thousand_columns(data: bytes, rng: random.Random) -> bytes:
    mark = rng.choice([b" ", b",", b";", b"\t"])
    return b"".join(
        line.rstrip(b"\n") + mark + mark.join([b"0.5"] * 10_000) + b"\n" for line in lines_of(data)[:20]
    )


def hostile_text(data: bytes, rng: random.Random) -> bytes:
    k = rng.randrange(len(data) + 1)
    return data[:k] + rng.choice(HOSTILE).encode("utf-8", "replace") + data[k + rng.choice([0, 0, 3]) :]


def end_marks(data: bytes, rng: random.Random) -> bytes:
    return data + rng.choice([b"\x1a", b"\x1a\x1a\x1a", b"\x04", b"[End]\n", b"\n\n\n", b"   "])


BYTE_CHANGES: tuple[Change, ...] = (
    *(cut, cut_at_line, double, double_rows, shuffle, swap_lines, drop_line, repeat_line),
    *(odd_number, odd_number, odd_number, negate, negate, scale, scale, change_digit, change_digit),
    *(decimal_commas, one_decimal_comma, one_decimal_comma, random_bytes, nothing_but_random, flip_bits),
    *(zero_bytes, encoded, accents, line_ends, blanks, comment_bomb, long_comment, long_line),
    *(ten_thousand_columns, hostile_text, hostile_text, end_marks),
)
