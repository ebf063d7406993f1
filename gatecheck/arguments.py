"""What the command line takes: the commands, their arguments and what is said of them."""

from __future__ import annotations

import argparse

from gatecheck import __version__

TYPE_CHECKING = False  # a type checker reads it as true; `typing` itself would cost start-up time
if TYPE_CHECKING:
    from collections.abc import Callable

FORMATS = (
    "json",
    "summary",
    "annotations",
    "azure-annotations",
    "sarif",
    "junit",
    "junit-strict",
    "code-quality",
    "tap",
    "page",
)
TEAMS = (
    "clinical",
    "laboratory",
    "online-experiments",
    "screening",
    "official-statistics",
    "model-evaluation",
)
KINDS = ("record", "plan", "policy", "waivers", "accepted", "seal", "verdict")
TESTS = (
    "two-sample-t",
    "one-sample-t",
    "paired-t",
    "one-proportion",
    "two-proportions",
    "correlation",
    "one-way-F",
    "chi-squared",
    "log-rank",
)
BOUNDARIES = ("obrien-fleming", "pocock", "haybittle-peto", "spending-obrien-fleming", "spending-pocock")
_MOST = 1000
_MOST_UNEQUAL = 100.0
#: The boundary of more looks is computed nowhere.
_MOST_LOOKS = 200


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
    what = "judge as a pull request into REV, whose policy counts"
    parser.add_argument("--base", metavar="REV", type=_revision, help=what)


def _add_weigh(parser: argparse.ArgumentParser) -> None:
    _add_folder(parser)
    _add_policy(parser)
    parser.add_argument(
        "--only-changed",
        action="store_true",
        help="judge all, but let only claims decide that are new or changed since REV, or rest on what changed",
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


def _add_trace(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("id", metavar="ID", help="id of the record")
    _add_folder(parser)
    _add_policy(parser)


def _add_design(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--test", required=True, choices=TESTS, metavar="TEST", help=f"one of {', '.join(TESTS)}")
    parser.add_argument(
        "--effect",
        required=True,
        type=float,
        help="true effect: d of t (paired-t: of the differences), h of proportions (2 asin sqrt p1 - 2 asin sqrt "
        "p2), r of a correlation, f of one-way-F, w of chi-squared, hazard ratio of log-rank",
    )
    parser.add_argument("--sides", type=int, choices=(1, 2), default=2, help="1: in the direction of the effect")
    parser.add_argument("--groups", type=_whole, metavar="K", help="number of groups of one-way-F")
    parser.add_argument("--df", type=_whole, metavar="K", help="degrees of freedom of chi-squared")
    parser.add_argument("--ratio", type=_ratio, metavar="R", help="second group over first (default: 1)")
    parser.add_argument("--assurance", type=_share, default=0.8, help="probability of standing (default: 0.8)")
    parser.add_argument("--prior", type=_share, help="probability of a real effect (default: that of the policy)")
    parser.add_argument("--family", type=_whole, default=1, metavar="SIZE", help="number of tests behind the claim")
    parser.add_argument("--looks", type=_looks, default=1, help="number of planned looks")
    parser.add_argument("--boundary", choices=BOUNDARIES, default=BOUNDARIES[0], help="boundary of the looks")
    _add_folder(parser)


def _revision(text: str) -> str:
    if not text.strip():
        raise argparse.ArgumentTypeError("it names no revision; leave the option out, or name one")
    return text


def _share(text: str) -> float:
    share = _number(text)
    if not 0 < share < 1:
        raise argparse.ArgumentTypeError(f"{text} is no probability above 0 and below 1")
    return share


def _whole(text: str, most: int = _MOST) -> int:
    number = _number(text)
    if not (1 <= number <= most and number.is_integer()):
        raise argparse.ArgumentTypeError(f"{text} is no whole number from 1 to {most}")
    return int(number)


def _looks(text: str) -> int:
    return _whole(text, _MOST_LOOKS)


def _ratio(text: str) -> float:
    ratio = _number(text)
    if not 1 / _MOST_UNEQUAL <= ratio <= _MOST_UNEQUAL:
        raise argparse.ArgumentTypeError(f"{text} is no ratio from {1 / _MOST_UNEQUAL:g} to {_MOST_UNEQUAL:g}")
    return ratio


def _number(text: str) -> float:
    """The number, or what is none, lest the parser tell the name of a function."""
    try:
        return float(text)
    except ValueError:
        return float("nan")


def _add_schema(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("kind", metavar="KIND", choices=KINDS, help=f"one of {', '.join(KINDS)}")


def _add_adopt(parser: argparse.ArgumentParser) -> None:
    _add_folder(parser)
    parser.add_argument("--policy", metavar="FILE", help="policy file (default: gatecheck.yaml in DIR)")


def _add_compare(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "first", metavar="A.json", help="a verdict, as `gatecheck weigh --write json=PATH` writes it"
    )
    parser.add_argument("second", metavar="B.json", help="the verdict to hold it against")


def _add_seal(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("plan", metavar="PLAN", help="file of the plan; its seal is written beside it")


def _add_refresh(parser: argparse.ArgumentParser) -> None:
    _add_folder(parser)
    parser.add_argument("--write", action="store_true", help="write the files; without it only the diff is shown")


def _add_rerun(parser: argparse.ArgumentParser) -> None:
    parser.description = (
        "Run the notebooks and scripts that the policy names under `rerun`, in a clean copy of the tree, and "
        "compare the records that they emit with those of the tree. It runs code, and a copy is no sandbox: run "
        "only what you trust."
    )
    parser.add_argument("folder", metavar="DIR", nargs="?", default=".", help="folder to rerun (default: here)")
    parser.add_argument("--policy", metavar="FILE", help="policy file (default: gatecheck.yaml in DIR)")


def _add_start(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--team", choices=TEAMS, help="kind of team whose policy to begin with")
    _add_folder(parser)


#: Each has its module of the same name in `gatecheck/commands`.
_COMMANDS: dict[str, tuple[str, Callable[[argparse.ArgumentParser], None]]] = {
    "weigh": ("judge every claim (the main job)", _add_weigh),
    "survey": ("list the records found, and what cannot be read", _add_folder),
    "explain": ("show all reasoning for one record", _add_explain),
    "trace": ("show one record through the history", _add_trace),
    "design": ("tell how large a study must be to meet the policy", _add_design),
    "seal": ("freeze a plan before its data: write its digest beside it", _add_seal),
    "refresh": ("write linked numbers in prose from the records", _add_refresh),
    "schema": ("print the JSON Schema of a format", _add_schema),
    "start": ("write a first policy, an example record and the file of a build", _add_start),
    "adopt": ("accept what falls short now, so that only new shortfalls block", _add_adopt),
    "compare": ("tell what two verdicts say differently, by claim and rule", _add_compare),
    "rerun": ("run the analysis in a clean copy, and compare its records; it runs code", _add_rerun),
}
