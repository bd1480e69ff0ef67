"""`fieldkit COMMAND`: finds the command, reads its arguments, runs it.

Exit codes: 0 all is well; 1 something is wrong with what was looked at, and it was said what; 2 misuse.
To add a command: a module beside this one with `arguments(parser)` and `run(args) -> int`, one line in COMMANDS. The
module is imported only when its command is asked for, so that a missing library of one stops no other.
"""

from __future__ import annotations

import argparse
import importlib
import os
import sys
from dataclasses import dataclass

import fieldkit
from fieldkit.errors import Refusal


@dataclass(frozen=True)
class Command:
    name: str
    module: str
    about: str


#: in the order in which the help shows them
COMMANDS: tuple[Command, ...] = (
    Command(
        "check", "fieldkit.cli.check", "check procedures and formulas: every problem, with line, column and remedy"
    ),
    Command("calc", "fieldkit.cli.calc", "work out one sum with units and the library's formulas, or list them"),
    Command("verify", "fieldkit.cli.verify", "say whether a record's PDF can be relied on, question by question"),
    Command("sheet", "fieldkit.cli.sheet", "show a compiled procedure as a tablet works from it"),
    Command("demo", "fieldkit.cli.demo", "make and serve the invented station, or play one record without a browser"),
    Command("serve", "fieldkit.cli.serve", "serve a station: the desk, the tablets' app, and what they send"),
)


def main(argv: list[str] | None = None) -> int:
    """Runs one command and gives its exit code; argparse ends misuse with 2 by itself."""
    words = sys.argv[1:] if argv is None else argv
    args = _parser(words).parse_args(words)
    try:
        return int(args.run(args))
    except Refusal as refusal:
        print(f"fieldkit {args.command}: {refusal.sentence} [{refusal.code}]", file=sys.stderr)
        return 1
    except BrokenPipeError:
        # the reader of a pipe went away; keep the interpreter from complaining again when it closes stdout
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 1


def _parser(words: list[str]) -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(prog="fieldkit", description="Field checklist and commissioning recorder.")
    parser.add_argument("--version", action="version", version=f"fieldkit {fieldkit.__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    asked = next((w for w in words if not w.startswith("-")), None)
    for command in COMMANDS:
        one = commands.add_parser(command.name, help=command.about, description=f"{command.about}.".capitalize())
        if command.name == asked:
            module = importlib.import_module(command.module)
            module.arguments(one)
            one.set_defaults(run=module.run)
    return parser


if __name__ == "__main__":
    sys.exit(main())
