"""The command line: one parser for all commands, and the outermost edge where errors become exit statuses."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence

import specgate
from specgate.cli import status
from specgate.cli.commands import COMMANDS
from specgate.terms.cautions import CAUTIONS
from specgate.terms.errors import EnvironmentProblem, UnusableProblem

_DESCRIPTION = """\
Checks control-system specifications written in YAML: computes what each loop does with a proved error bound, judges
every requirement, flags each one that rests on a hand formula outside its range, and prints the report to sign."""

_START = """\
a first session:
  specgate new my_project              make a small project
  specgate check my_project            verdicts and findings in the terminal
  specgate explain settling_time       what a word in them means, and its source
  specgate report my_project -o my_project.pdf"""


def _epilog() -> str:
    cautions = "\n".join(f"  {caution}" for caution in CAUTIONS)
    return f"{_START}\n\n{status.EXPLAINED}\n\ncautions:\n{cautions}"


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="specgate",
        description=_DESCRIPTION,
        epilog=_epilog(),
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.add_argument("--version", action="version", version=f"specgate {specgate.__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True, title="commands")
    for command in COMMANDS.values():
        sub = commands.add_parser(
            command.name,
            help=command.summary,
            description=command.summary[0].upper() + command.summary[1:] + ".",
            formatter_class=argparse.RawDescriptionHelpFormatter,
        )
        command.configure(sub)
    return parser


def main(arguments: Sequence[str]) -> int:
    """Run one command and return its exit status (see `status`)."""
    try:
        options = _parser().parse_args(arguments)
        outcome = COMMANDS[options.command].run(options)
        sys.stdout.flush()
        return outcome
    except SystemExit as leave:  # argparse: 0 after --help and --version, 2 for an unusable call
        return leave.code if isinstance(leave.code, int) else status.UNUSABLE
    except KeyboardInterrupt:
        return status.INTERRUPTED
    except BrokenPipeError:
        # The reader went away (`| head`); keep the interpreter from complaining while it flushes.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return status.PIPE_CLOSED
    except EnvironmentProblem as problem:
        print(f"specgate: {problem}", file=sys.stderr)
        return status.ENVIRONMENT
    except UnusableProblem as problem:
        print(f"specgate: {problem}", file=sys.stderr)
        return status.UNUSABLE
    except Exception:
        import traceback

        traceback.print_exc()
        print("specgate: this is a defect of specgate, not of your project; no verdict was given.", file=sys.stderr)
        return status.BROKEN
