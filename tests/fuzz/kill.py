"""Kill runs that write a kit file: python tests/fuzz/kill.py --kills 200

Then two runs at once, and a disk that is full. The exit code is 0 where no file was torn.
"""

import argparse
import sys
import tempfile
from pathlib import Path

from fuzz_kill import TOLERANCES, at_once, clear_away, full_disk, kill_many, passed_over, workshop


def main() -> int:
    asked = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    asked.add_argument("--kills", type=int, default=200)
    asked.add_argument("--rounds", type=int, default=20)
    asked.add_argument("--seed", type=int, default=1)
    options = asked.parse_args()
    with tempfile.TemporaryDirectory() as top:
        shop = workshop(Path(top) / "shelf")
        found = kill_many(shop, options.kills, options.seed)
        print(f"{options.kills} kills, {found.while_writing} of them while the temporary file was there")
        print("kit file afterwards: " + ", ".join(f"{what} {n}" for what, n in sorted(found.after.items())))
        print(f"torn: {found.torn}; temporary files left behind: {found.left_behind}")
        print(f"other commands pass them over: {passed_over(shop)}")
        left = clear_away(shop)
        print(f"left after a later run: {left}")
        both = at_once(shop, options.rounds)
        print(f"two runs at once, whose kit stood there: {dict(both)}")
        full = full_disk(shop, [0, 1, 4096, 8192, 20_000])
        print(f"full disk (exit code, old file): {dict(full)}")
        sound = (
            found.torn == 0 and left == 0 and both.keys() <= set(TOLERANCES) and full.keys() == {(2, "kept")}
        )
    return 0 if sound else 1


if __name__ == "__main__":
    sys.exit(main())
