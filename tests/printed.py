"""What a page shows of a command against what it prints."""

import re

CLOSE = 0.03
"""Another processor rounds differently, and chance that is drawn anew for a verdict moves its last digit."""

NUMBER = r"[-+]?\d+(?:\.\d+)?(?:e[-+]?\d+)?"


def alike(shown, printed):
    """Return whether two lines say the same, numbers within `CLOSE`; blanks between columns do not matter.

    A line that ends in "…" is the beginning of the other.
    """
    shown, printed = " ".join(shown.split()), " ".join(printed.split())
    begun = shown.endswith(" …")
    one, other = (re.sub(NUMBER, "0", line) for line in (shown.removesuffix(" …"), printed))
    if one != other and not (begun and other.startswith(f"{one} ")):
        return False
    numbers = re.findall(NUMBER, shown)
    pairs = zip(numbers, re.findall(NUMBER, printed)[: len(numbers)], strict=True)
    return all(
        abs(float(one) - float(other)) <= CLOSE * abs(float(one)) + last_digit(one) for one, other in pairs
    )


def last_digit(number):
    """Return what one more in the last digit is, at most 0.001, so that a rounding is no difference."""
    decimals = len(number.partition("e")[0].partition(".")[2])
    return min(1e-3, 10.0**-decimals)


def missing(shown, printed):
    """Return the first line of the page that a command does not print; a line "…" stands for any number of lines."""
    rest = printed.splitlines()
    skip = False
    for line in shown.splitlines():
        if line.strip() == "…":
            skip = True
            continue
        while skip and rest and not alike(line, rest[0]):
            rest.pop(0)
        if not rest or not alike(line, rest[0]):
            return line
        rest.pop(0)
        skip = False
    return None if skip or not rest else f"(and then) {rest[0]}"
