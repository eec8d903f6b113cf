"""The command line: what may be asked for. `command` does it.

    blender -b props.blend -c seamwright cover --out out        in the application
    seamwright cover props.blend --out out                      with the host as a Python module
"""

import argparse
import json
import os
import sys

from . import command, names, properties, words
from .command import WrongUse

KINDS = ("pdf", "svg", "json", "html")
STATUSES = """exit status: 0 every form covered and no piece strained; 1 covered, but a piece is strained;
2 wrong use; 3 a form could not be covered (the others are done)"""


def main(argv):
    """Do what `argv` asks for; returns the exit status. Only the answer goes to standard output."""
    try:
        asked = parser().parse_args(argv)
        answer = _own_stdout()
        with properties.there():
            result, status = getattr(command, asked.command)(asked)
    except SystemExit as end:
        return end.code if isinstance(end.code, int) else 2
    except WrongUse as error:
        print(f"{names.COMMAND}: {error}", file=sys.stderr)
        return 2
    plain = words.of_goods(result["goods"]) if "goods" in result else words.of_forms(result["forms"])
    with os.fdopen(answer, "w", encoding="utf-8") as out:
        out.write(json.dumps(result, indent=2) + "\n" if asked.json else plain)
    return status


def parser():
    """The argparse parser of the three commands."""
    top = argparse.ArgumentParser(
        prog=names.COMMAND, description="Seams, flat pieces and cutting sheets for forms covered in sheet goods.",
        epilog=STATUSES, formatter_class=argparse.RawDescriptionHelpFormatter)
    commands = top.add_subparsers(dest="command", required=True, metavar="COMMAND")
    files = argparse.ArgumentParser(add_help=False)
    files.add_argument("files", nargs="*", metavar="FILE", help=".blend, .obj, .ply or .stl; without one, the open scene")
    files.add_argument("--object", action="append", metavar="NAME",
                       help="only this object; may be given again (default: every visible mesh object with faces)")
    answer = argparse.ArgumentParser(add_help=False)
    answer.add_argument("--json", action="store_true", help="print the summary as JSON on standard output, and nothing else")

    cover = commands.add_parser("cover", parents=[files, answer], help="cover forms and write their cutting sheets",
                                epilog=STATUSES, formatter_class=argparse.RawDescriptionHelpFormatter)
    cover.add_argument("--goods", metavar="NAME|FILE.toml", help="goods by name, or your own goods file")
    cover.add_argument("--comfort", type=float, metavar="X", help="0 at the goods' hard limits, 1 in the comfortable ones")
    cover.add_argument("--thrift", type=float, metavar="X", help="price of seams (default: the cheapest that fit are found)")
    cover.add_argument("--route", choices=("through", "edges"), help="where seams may run")
    cover.add_argument("--out", metavar="DIR", default="out", help="folder of the sheets (default: out)")
    cover.add_argument("--kinds", metavar="LIST", type=_kinds, default=KINDS,
                       help=f"kinds of sheets, with commas (default: {','.join(KINDS)})")
    cover.add_argument("--paper", choices=("roll", "a4", "letter"), default="roll", help="paper of the PDF (default: roll)")
    cover.add_argument("--workers", type=int, default=1, metavar="N", help="forms covered at the same time (default: 1)")
    cover.add_argument("--save", metavar="FILE.blend", help="write the covered scene there")
    commands.add_parser("check", parents=[files, answer], help="check forms, cover nothing")
    commands.add_parser("goods", parents=[answer], help="the goods and their limits")
    return top


def _kinds(text):
    kinds = tuple(kind.strip() for kind in text.split(",") if kind.strip())
    unknown = [kind for kind in kinds if kind not in KINDS]
    if unknown or not kinds:
        raise argparse.ArgumentTypeError(f"{text!r}: known kinds are {', '.join(KINDS)}")
    return kinds


def _own_stdout():
    """A copy of standard output for the answer alone: whatever else is printed goes to standard error from now on."""
    sys.stdout.flush()
    answer = os.dup(1)
    os.dup2(2, 1)
    return answer
