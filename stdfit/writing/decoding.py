"""Tables decoded strictly: what a decoder says, turned into an error with key and nearest valid key."""

import re
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import msgspec

from stdfit.base.errors import KitError
from stdfit.data.words import quoted, suggestion

MEND = "take the file as stdfit wrote it"

_IN_WORDS = {
    "float": "a number",
    "int": "a whole number",
    "str": "text",
    "array": "a list",
    "object": "a table",
    "bool": "true or false",
    "date": "a date",
    "datetime": "a date",
    "time": "a time",
    "null": "null",
}


def toml_of(text: str, path: Path | str) -> dict[str, Any]:
    """Return what the TOML text of a file that the program wrote says.

    Raises
    ------
    KitError
        It is no TOML.
    """
    try:
        return tomllib.loads(text)
    except RecursionError as fault:
        raise KitError("too deeply nested", MEND, file=path) from fault
    except ValueError as fault:  # a TOMLDecodeError is one; so is an endless integer
        raise KitError(f"not TOML: {quoted(str(fault), 100)[1:-1]}", MEND, file=path) from fault


def decoder_fault(
    message: str, path: Path | str, tables: Mapping[str, type[msgspec.Struct]], whole: type[msgspec.Struct]
) -> KitError:
    """Turn a decoder's message into one with key and nearest valid key.

    Parameters
    ----------
    message : str
    path : path
        The file, for the message.
    tables : mapping
        The tables by the last part of their key.
    whole : type
        The whole file, for keys in none of them.
    """
    what, _, where = message.rpartition(" - at `$")
    what, where = (what, where.rstrip("`").lstrip(".")) if what else (message, "")
    unknown = re.fullmatch("Object contains unknown field `(.*)`", what, re.DOTALL)
    if unknown is not None:
        table = re.sub(r"\[[^]]*\]", "", where).split(".")[-1]
        known = tables.get(table, whole).__struct_fields__
        key = ".".join(part for part in (where, quoted(unknown[1])[1:-1]) if part)
        return KitError("unknown key", suggestion(unknown[1], known), file=path, key=key)
    what = re.sub("`([a-z]+)`", lambda word: _IN_WORDS.get(word[1], word[0]), what[:1].lower() + what[1:])
    return KitError(what, MEND, file=path, key=where or None)
