"""Verification record of this installation: python -m aggsim.verify [--output PATH] [--quick].

Carries out every check against closed solutions and published figures, prints the record, and writes it with the date
to a text file and, one line per check, to a CSV file beside it. The exit code is 1 where a check failed.
"""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from datetime import date
from pathlib import Path

from aggsim import __version__
from aggsim.outputs._files import write_atomically
from aggsim.verification import record


def main(arguments: Sequence[str] | None = None) -> int:
    """Make, write and print a record; return 0 where all checks passed, 1 otherwise."""
    parser = argparse.ArgumentParser(
        prog="python -m aggsim.verify",
        description="Check this installation of aggsim against closed solutions and published figures, and write a "
        "dated record.",
    )
    default = Path(f"aggsim-verification-{date.today().isoformat()}.txt")
    parser.add_argument(
        "--output", type=Path, default=default, metavar="PATH", help="text file to write (%(default)s)"
    )
    parser.add_argument(
        "--quick", action="store_true", help="leave out orders of convergence and error estimates"
    )
    given = parser.parse_args(arguments)
    if given.output.is_dir():
        parser.error(f"--output={given.output} is a folder; a file name is needed")
    table = given.output.with_suffix(".csv")
    if given.output == table:
        parser.error(f"--output={given.output} is the name of the table; give the text file another ending")
    if not given.output.parent.is_dir():
        parser.error(f"the folder {given.output.parent} does not exist")
    made = record.make(__version__, quick=given.quick, report=_progress)
    text = made.text()
    write_atomically(given.output, text.encode())
    write_atomically(table, made.csv().encode())
    print(text)
    print(f"written: {given.output}, {table}")
    return 1 if made.failed else 0


def _progress(what: str) -> None:
    print(f"checking {what} ...", file=sys.stderr, flush=True)


if __name__ == "__main__":
    sys.exit(main())
