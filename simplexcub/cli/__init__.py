"""The command line: the only place that prints, reads arguments or chooses an exit status.

Results go to standard output, everything else to standard error, and every complaint is one line.

======  ======================================================================
status  meaning
======  ======================================================================
0       done
1       the answer is no: not verified, nothing found, tolerance not met
2       bad input
130     interrupted
141     the reader of standard output went away
======  ======================================================================
"""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from contextlib import suppress
from difflib import get_close_matches
from importlib import import_module

from simplexcub.cli.options import Parser
from simplexcub.cli.speech import complain, tolerate_narrow_encodings
from simplexcub.errors import InputError, SimplexcubError
from simplexcub.version import VERSION

COMMANDS = {
    "moments": "exact mean of a monomial, as a fraction",
    "solve": "find a rule, check it and print it",
    "verify": "check a table of nodes and weights, whoever made it",
    "export": "print a table in another format",
    "average": "mean of a function of the spectrum, with its error",
    "tables": "list the rules that come with the package",
    "draw": "draw a rule, or how the shipped rules converge",
}


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command; `argv` is ``sys.argv[1:]`` by default. Returns the exit status."""
    tolerate_narrow_encodings()
    try:
        status = _run(list(sys.argv[1:] if argv is None else argv))
        sys.stdout.flush()
    except BrokenPipeError:
        _silence_stdout()
        return 141
    except OSError as error:  # files are the business of the floors below; what is left is standard output
        _silence_stdout()
        complain(f"the result must be written to standard output; got {(error.strerror or str(error)).lower()}")
        return 2
    except KeyboardInterrupt:
        complain("interrupted")
        return 130
    except InputError as error:
        complain(str(error))
        return 2
    except SimplexcubError as error:
        complain(str(error))
        return 1
    return status


def _run(argv: list[str]) -> int:
    try:
        return _dispatch(argv)
    except SystemExit as stop:  # argparse leaves this way after --help, --version and a usage error
        return stop.code if isinstance(stop.code, int) else 0


def _dispatch(argv: list[str]) -> int:
    if argv and argv[0] in COMMANDS:
        # Only the chosen command is loaded, so that help and complaints do not wait for the numerical floors.
        command = import_module(f"simplexcub.cli.{argv[0]}")
        parser = Parser(prog=f"simplexcub {argv[0]}", summary=COMMANDS[argv[0]], example=command.EXAMPLE)
        command.add_options(parser)
        status: int = command.run(parser.parse_intermixed_args(argv[1:]))
        return status
    listing = "\n".join(f"  {name:<9} {summary}" for name, summary in COMMANDS.items())
    parser = Parser(
        prog="simplexcub",
        summary="Means over the probability simplex: exact moments, cubature rules, their verification and tables.",
        example="simplexcub solve hilbert-schmidt -N 3 -t 7",
        more=f"commands:\n{listing}\n\n'simplexcub COMMAND --help' explains one command.",
    )
    parser.add_argument("--version", action="version", version=f"simplexcub {VERSION}")
    parser.add_argument("command", metavar="COMMAND", help="one of the commands below")
    name = parser.parse_known_args(argv)[0].command  # whatever follows belongs to the command
    near = get_close_matches(name, COMMANDS, n=1)
    raise InputError(f"the command must be one of {', '.join(COMMANDS)}", repr(name), *(f"Nearest: {n}" for n in near))


def _silence_stdout() -> None:
    """Point standard output at nothing, or the interpreter complains once more when it flushes at exit."""
    with suppress(OSError):  # a stream that stands in for it has no descriptor, and nothing to flush at exit
        descriptor = sys.stdout.fileno()
        nothing = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nothing, descriptor)
        os.close(nothing)
