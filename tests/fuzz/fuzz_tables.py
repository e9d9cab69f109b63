"""What is done to tables of names and values, TOML or JSON: values of the wrong type, keys twice, wrong or missing."""

import json
import random
import re

from fuzz_bytes import HOSTILE, NUMBERS, Change

PATHS = [
    *(
        "/dev/zero",
        "/dev/null",
        "/dev/stdin",
        "/dev/full",
        "/proc/self/mem",
        "/etc/passwd",
        "/",
        ".",
        "..",
        "",
        "~",
    ),
    *(
        "**",
        "**/*",
        "../**/*.s1p",
        "/**/*.s1p",
        "*/*/*/*/*",
        "***",
        "a**",
        "[",
        "[a",
        "{a,b}",
        "?",
        "*",
        "none-*.s1p",
    ),
    *(
        "fifo",
        "ring",
        "dangling",
        "folder",
        "bench.toml",
        "kit.toml",
        "./open-1.s1p",
        "open-1.s1p/",
        "open-1.s1p/x",
    ),
    *(
        "x" * 300,
        "a/" * 2000 + "b",
        "a\\b",
        "C:\\x",
        "file:///etc/passwd",
        "http://localhost/x",
        "|touch pwned",
        "-",
    ),
]


def toml_text(text: str) -> str:
    return json.dumps(text)


def value(rng: random.Random, depth: int = 0) -> str:
    """Return any value in a spelling that TOML knows, or nearly."""
    kind = rng.randrange(12)
    if kind < 3:
        return rng.choice(NUMBERS)
    if kind < 5:
        return toml_text(rng.choice(HOSTILE))
    if kind < 7:
        return toml_text(rng.choice(PATHS))
    if kind == 7 and depth < 3:
        return "[" + ", ".join(value(rng, depth + 1) for _ in range(rng.randrange(4))) + "]"
    if kind == 8 and depth < 3:
        inner = value(rng, depth + 1)
        return rng.choice([f"{{ value = {inner} }}", f"{{ value = {inner}, u = {value(rng, depth + 1)} }}"])
    if kind == 9:
        n = rng.choice([50, 2000, 100_000])
        return rng.choice(["[" * n + "]" * n, "{a=" * n + "1" + "}" * n, "[" * n, '["' + "x" * n + '"]'])
    return rng.choice(
        [
            "true",
            "false",
            "null",
            '"open"',
            '"load"',
            '"raw"',
            '"corrected"',
            "'''x'''",
            "07:32:00",
            "2024-02-30",
        ]
    )


def _key_lines(lines: list[str]) -> list[int]:
    return [k for k, line in enumerate(lines) if re.match(r'\s*[\w."-]+\s*[=:]', line)]


def _changed(data: bytes, rng: random.Random, change) -> bytes:
    lines = data.decode("utf-8", "replace").split("\n")
    found = _key_lines(lines)
    if found:
        change(lines, rng.choice(found))
    return "\n".join(lines).encode("utf-8", "replace")


def any_value(data: bytes, rng: random.Random) -> bytes:
    def change(lines, k):
        key, mark, _ = re.match(r"(\s*[^=:]*?)\s*([=:])(.*)", lines[k], re.DOTALL).groups()
        lines[k] = f"{key} {mark} {value(rng)}" + ("," if mark == ":" else "")

    return _changed(data, rng, change)


def number_in_list(data: bytes, rng: random.Random) -> bytes:
    def change(lines, k):
        numbers = list(re.finditer(r"-?\d[\d.e+-]*", lines[k]))
        if numbers:
            one = rng.choice(numbers)
            lines[k] = lines[k][: one.start()] + rng.choice(["-1.0", *NUMBERS]) + lines[k][one.end() :]

    return _changed(data, rng, change)


def key_twice(data: bytes, rng: random.Random) -> bytes:
    return _changed(data, rng, lambda lines, k: lines.insert(k, lines[k]))


def key_gone(data: bytes, rng: random.Random) -> bytes:
    return _changed(data, rng, lambda lines, k: lines.pop(k))


def key_wrong(data: bytes, rng: random.Random) -> bytes:
    wrong = rng.choice(
        ["x", "\x1b[31m", "__class__", "a.b.c", '"\\u001b[31m"', "a." * 3000 + "a", "é", "-", '""']
    )

    def change(lines, k):
        lines[k] = rng.choice(
            [f"{wrong} = 1", lines[k].replace(lines[k].split("=")[0].strip()[:3], wrong, 1)]
        )

    return _changed(data, rng, change)


def table_twice(data: bytes, rng: random.Random) -> bytes:
    parts = re.split(rb"(?m)^(?=\[)", data)
    if len(parts) > 1:
        k = rng.randrange(1, len(parts))
        parts.insert(k, parts[k])
    return b"".join(parts)


def table_gone(data: bytes, rng: random.Random) -> bytes:
    parts = re.split(rb"(?m)^(?=\[)", data)
    if len(parts) > 1:
        del parts[rng.randrange(1, len(parts))]
    return b"".join(parts)


def many_tables(data: bytes, rng: random.Random) -> bytes:
    parts = re.split(rb"(?m)^(?=\[)", data)
    return data + parts[-1] * rng.choice([2, 50, 1000])


def hostile_name(data: bytes, rng: random.Random) -> bytes:
    """One name everywhere: a standard called '../../x' or with an escape sequence in it."""
    found = re.findall(rb'"([a-z][a-z -]*)"', data)
    if not found:
        return data
    old, new = rng.choice(found), json.dumps(rng.choice(HOSTILE))[1:-1].encode()
    return data.replace(b'"' + old + b'"', b'"' + new + b'"')


def hostile_path(data: bytes, rng: random.Random) -> bytes:
    found = list(re.finditer(rb'"[^"\n]*[*.][^"\n]*"', data))
    if not found:
        return data
    one = rng.choice(found)
    return data[: one.start()] + toml_text(rng.choice(PATHS)).encode() + data[one.end() :]


TABLE_CHANGES: tuple[Change, ...] = (
    *(
        any_value,
        any_value,
        any_value,
        any_value,
        number_in_list,
        number_in_list,
        key_twice,
        key_gone,
        key_gone,
    ),
    *(
        key_wrong,
        table_twice,
        table_gone,
        many_tables,
        hostile_name,
        hostile_name,
        hostile_path,
        hostile_path,
    ),
)
