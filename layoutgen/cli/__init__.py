"""The command line: one verb, one outcome, one place that turns outcomes into exit codes."""

from __future__ import annotations

import argparse
import os
import sys
import traceback
from collections.abc import Sequence

from layoutgen import __version__
from layoutgen.cli import build, new, plan, substrates
from layoutgen.cli.console import Console
from layoutgen.errors import LayoutError, ReadBackError

__all__ = ["main"]

# Batches of small matrices gain nothing from several threads, and lose much where the cores are busy.
# Set before any numerics are loaded; a value that is already there stays.
for _threads in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(_threads, "1")

MET, FAULT, INPUT, MISSED, READ_BACK, INTERRUPTED = 0, 1, 2, 3, 4, 130

_EPILOG = """\
exit codes:
  0    done, and every requirement is met
  3    done, but a requirement is missed; the package is delivered all the same
  2    the input has to be put right, or asks for what cannot be built so
  4    a written file failed its read-back; nothing is delivered
  1    a fault of layoutgen itself
  130  interrupted
"""


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command and return its exit code.

    Parameters
    ----------
    argv : sequence of str, optional
        Arguments; those of the process by default.

    Raises
    ------
    SystemExit
        With 2 for arguments that make no command, with 0 for ``--help`` and ``--version``.
    """
    args = _parser().parse_args(argv)
    console = Console(quiet=getattr(args, "quiet", False))
    code = _run(args, console)
    console.close()
    return code


def _run(args: argparse.Namespace, console: Console) -> int:
    try:
        met = args.run(args, console)
    except KeyboardInterrupt:
        console.complain("layoutgen: interrupted")
        return INTERRUPTED
    except ReadBackError as error:
        console.complain(f"layoutgen: {error}")
        return READ_BACK
    except LayoutError as error:  # of one fault or of many, one line each
        console.complain(str(error))
        return INPUT
    except Exception as error:  # ours, whatever it is: the user gets a sentence, a developer the traceback
        if getattr(args, "debug", False):
            console.complain("".join(traceback.format_exception(error)).rstrip())
        said = " ".join(str(error).split()) or "no message"
        console.complain(
            f"layoutgen: a fault of its own ({type(error).__name__}: {said[:200]}); "
            "run it again with --debug and report what it prints"
        )
        return FAULT
    return MET if met else MISSED


def _parser() -> argparse.ArgumentParser:
    common = argparse.ArgumentParser(add_help=False)
    common.add_argument(
        "--quiet",
        action="store_true",
        default=argparse.SUPPRESS,
        help="print nothing but faults, and the result asked for with --json",
    )
    common.add_argument(
        "--debug",
        action="store_true",
        default=argparse.SUPPRESS,
        help="show where a fault of layoutgen itself happened",
    )
    parser = argparse.ArgumentParser(
        prog="layoutgen",
        parents=[common],
        allow_abbrev=False,
        epilog=_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        description="Comb-line band-pass filters, from a specification to fabrication files.",
    )
    parser.add_argument("--version", action="version", version=f"layoutgen {__version__}")
    verbs = parser.add_subparsers(title="commands", dest="command", required=True, metavar="COMMAND")
    for verb in (new, plan, build, substrates):
        name, about = verb.__name__.rsplit(".", 1)[-1], (verb.__doc__ or "").strip().splitlines()[0]
        sub = verbs.add_parser(
            name,
            parents=[common],
            allow_abbrev=False,
            description=about,
            help=about[0].lower() + about[1:].rstrip("."),
        )
        verb.add_arguments(sub)
        sub.set_defaults(run=verb.run)
    return parser


if __name__ == "__main__":
    sys.exit(main())
