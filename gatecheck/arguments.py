"""What the command line takes: the commands, their arguments and what is said of them."""

from __future__ import annotations

import argparse

from gatecheck import __version__

TYPE_CHECKING = False  # a type checker reads it as true; `typing` itself would cost start-up time
if TYPE_CHECKING:
    from collections.abc import Callable

FORMATS = ("json", "summary", "annotations")
KINDS = ("record", "plan", "policy", "waivers", "verdict")
TESTS = ("two-sample-t", "one-sample-t", "two-proportions", "correlation")
BOUNDARIES = ("obrien-fleming", "pocock", "haybittle-peto", "spending-obrien-fleming", "spending-pocock")
_MOST = 1000


def parser() -> argparse.ArgumentParser:
    """Return the parser of the whole command line; what it parses names its `command`."""
    top = argparse.ArgumentParser(
        prog="gatecheck",
        description="Judge whether each claimed finding rests on evidence strong enough for the team's policy.",
        epilog="Exit status: 0 every claim stands or is waived, 1 a claim falls short, 2 wrong usage, "
        "3 the gate cannot judge.",
    )
    top.add_argument("--version", action="version", version=f"gatecheck {__version__}")
    commands = top.add_subparsers(title="commands", required=True, metavar="COMMAND", dest="command")
    for name, (what, add) in _COMMANDS.items():
        add(commands.add_parser(name, help=what))
    return top


def _add_folder(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("folder", metavar="DIR", nargs="?", default=".", help="folder to judge (default: here)")


def _add_policy(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--policy", metavar="FILE", help="policy file (default: gatecheck.yaml in DIR)")
    parser.add_argument("--base", metavar="REV", help="judge as a pull request into REV, whose policy counts")


def _add_weigh(parser: argparse.ArgumentParser) -> None:
    _add_folder(parser)
    _add_policy(parser)
    parser.add_argument(
        "--only-changed",
        action="store_true",
        help="judge all, but let only claims that are new or changed since REV decide the exit status",
    )
    parser.add_argument(
        "--write",
        metavar="FORMAT=PATH",
        action="append",
        default=[],
        help=f"write a report instead of the account; formats: {', '.join(FORMATS)}; - is standard output",
    )


def _add_explain(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("id", metavar="ID", help="id of the record")
    _add_folder(parser)
    _add_policy(parser)


def _add_design(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--test", required=True, choices=TESTS, help=f"one of {', '.join(TESTS)}")
    parser.add_argument(
        "--effect", required=True, type=float, help="true effect: d of means, h of proportions, r of a correlation"
    )
    parser.add_argument("--assurance", type=_share, default=0.8, help="probability of standing (default: 0.8)")
    parser.add_argument("--prior", type=_share, help="probability of a real effect (default: that of the policy)")
    parser.add_argument("--family", type=_whole, default=1, metavar="SIZE", help="number of tests behind the claim")
    parser.add_argument("--looks", type=_whole, default=1, help="number of planned looks")
    parser.add_argument("--boundary", choices=BOUNDARIES, default=BOUNDARIES[0], help="boundary of the looks")
    _add_folder(parser)


def _share(text: str) -> float:
    share = float(text)
    if not 0 < share < 1:
        raise ValueError(text)
    return share


def _whole(text: str) -> int:
    number = int(text)
    if not 1 <= number <= _MOST:
        raise ValueError(text)
    return number


def _add_schema(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("kind", metavar="KIND", choices=KINDS, help=f"one of {', '.join(KINDS)}")


#: Each has its module of the same name in `gatecheck/commands`.
_COMMANDS: dict[str, tuple[str, Callable[[argparse.ArgumentParser], None]]] = {
    "weigh": ("judge every claim (the main job)", _add_weigh),
    "survey": ("list the records found, and what cannot be read", _add_folder),
    "explain": ("show all reasoning for one record", _add_explain),
    "design": ("tell how large a study must be to meet the policy", _add_design),
    "schema": ("print the JSON Schema of a format", _add_schema),
    "start": ("write a first policy and an example record", _add_folder),
}
