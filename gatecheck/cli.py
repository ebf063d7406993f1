"""Arguments in, exit status out; the only module that reads arguments, writes streams and reports, and exits."""

from __future__ import annotations

import argparse
import os
import sys

from gatecheck import __version__
from gatecheck.errors import CannotJudge
from gatecheck.model.exit import Exit

TYPE_CHECKING = False  # a type checker reads it as true; `typing` itself would cost start-up time
if TYPE_CHECKING:
    from collections.abc import Callable, Sequence
    from pathlib import Path

    from gatecheck.policy import Policy

FORMATS = ("json", "summary", "annotations")
KINDS = ("record", "plan", "policy", "waivers", "verdict")
TESTS = ("two-sample-t", "one-sample-t", "two-proportions", "correlation")
BOUNDARIES = ("obrien-fleming", "pocock", "haybittle-peto", "spending-obrien-fleming", "spending-pocock")
_MOST = 1000
_WIDTH = 80
_WIDEST = 140


class _Usage(Exception):  # noqa: N818  # wrong usage, as its exit status is called
    """The command was called in a way that it does not know."""


def run() -> None:
    """Run the command with the arguments of the process, and exit with its status."""
    for stream in (sys.stdout, sys.stderr):
        stream.reconfigure(encoding="utf-8", errors="replace")  # type: ignore[union-attr]
    try:
        status = main(sys.argv[1:])
        sys.stdout.flush()
    except BrokenPipeError:
        # The reader has gone; without this the interpreter complains when it flushes at exit.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        status = Exit.CANNOT_JUDGE
    sys.exit(status)


def main(arguments: Sequence[str]) -> int:
    """Run the command with `arguments` and return its exit status."""
    parsed = _parser().parse_args(arguments)
    act: Callable[[argparse.Namespace], int] = parsed.act
    try:
        return act(parsed)
    except _Usage as wrong:
        _complain(str(wrong))
        return Exit.USAGE
    except CannotJudge as stop:
        _complain(f"cannot judge: {stop.message}; {stop.advice}.")
        return Exit.CANNOT_JUDGE
    except KeyboardInterrupt:
        _complain("interrupted before it could judge.")
        return Exit.CANNOT_JUDGE


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="gatecheck",
        description="Judge whether each claimed finding rests on evidence strong enough for the team's policy.",
        epilog="Exit status: 0 every claim stands or is waived, 1 a claim falls short, 2 wrong usage, "
        "3 the gate cannot judge.",
    )
    parser.add_argument("--version", action="version", version=f"gatecheck {__version__}")
    commands = parser.add_subparsers(title="commands", required=True, metavar="COMMAND")
    _add_weigh(commands.add_parser("weigh", help="judge every claim (the main job)"))
    _add_survey(commands.add_parser("survey", help="list the records found, and what cannot be read"))
    _add_explain(commands.add_parser("explain", help="show all reasoning for one record"))
    _add_design(commands.add_parser("design", help="tell how large a study must be to meet the policy"))
    _add_schema(commands.add_parser("schema", help="print the JSON Schema of a format"))
    _add_start(commands.add_parser("start", help="write a first policy and an example record"))
    return parser


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
    parser.set_defaults(act=_weigh)


def _add_survey(parser: argparse.ArgumentParser) -> None:
    _add_folder(parser)
    parser.set_defaults(act=_survey)


def _add_explain(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("id", metavar="ID", help="id of the record")
    _add_folder(parser)
    _add_policy(parser)
    parser.set_defaults(act=_explain)


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
    parser.set_defaults(act=_design)


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
    parser.set_defaults(act=_schema)


def _add_start(parser: argparse.ArgumentParser) -> None:
    _add_folder(parser)
    parser.set_defaults(act=_start)


def _weigh(parsed: argparse.Namespace) -> int:
    writes = [_split_write(each) for each in parsed.write]
    if parsed.only_changed and parsed.base is None:
        raise _Usage("--only-changed needs --base: say since which revision")
    from gatecheck.gate import Request, check  # noqa: PLC0415  # loads numpy, which --help does without
    from gatecheck.render import RENDERERS, account  # noqa: PLC0415

    verdict = check(Request(_folder(parsed), _policy_path(parsed), parsed.base, parsed.only_changed))
    if not writes:
        _tell(account(verdict, _width()))
    for form, path in writes:
        _write(path, RENDERERS[form](verdict))
    return verdict.exit


def _survey(parsed: argparse.Namespace) -> int:
    from gatecheck.render import survey  # noqa: PLC0415
    from gatecheck.scan import scan  # noqa: PLC0415

    globs = _readable_policy(parsed).document.scan
    _tell(survey(scan(_folder(parsed), globs.include, globs.exclude), _width()))
    return Exit.STANDS


def _explain(parsed: argparse.Namespace) -> int:
    from gatecheck.gate import Request, check  # noqa: PLC0415
    from gatecheck.render import account, explain  # noqa: PLC0415

    request = Request(_folder(parsed), _policy_path(parsed), parsed.base, explain=frozenset([parsed.id]))
    verdict = check(request)
    if any(one.id == parsed.id for one in verdict.judged):
        _tell(explain(verdict, parsed.id, _width()))
        return Exit.STANDS
    if verdict.problems:
        _tell(account(verdict, _width()))
        return Exit.CANNOT_JUDGE
    raise _Usage(f"there is no record {parsed.id!a}; `gatecheck survey` lists those that there are")


def _design(parsed: argparse.Namespace) -> int:
    from gatecheck.design import design  # noqa: PLC0415
    from gatecheck.model.design import DesignQuestion  # noqa: PLC0415
    from gatecheck.render import design as told  # noqa: PLC0415

    asked = DesignQuestion(
        parsed.test, parsed.effect, parsed.assurance, parsed.prior, parsed.family, parsed.looks, parsed.boundary
    )
    _tell(told(design(asked, _readable_policy(parsed)), _width()))
    return Exit.STANDS


def _readable_policy(parsed: argparse.Namespace) -> Policy:
    from gatecheck.policies import standing_policy  # noqa: PLC0415

    standing = standing_policy(_folder(parsed), None, None)
    if standing.policy is None:
        raise CannotJudge("the policy cannot be read", "see `gatecheck weigh` for what is wrong with it")
    return standing.policy


def _schema(parsed: argparse.Namespace) -> int:
    from gatecheck.schema import published  # noqa: PLC0415

    _tell(published(parsed.kind))
    return Exit.STANDS


def _start(parsed: argparse.Namespace) -> int:
    from gatecheck.starting import start  # noqa: PLC0415

    _tell("".join(f"{line}\n" for line in start(_folder(parsed))))
    return Exit.STANDS


def _split_write(text: str) -> tuple[str, str]:
    form, equals, path = text.partition("=")
    if form not in FORMATS or not equals or not path:
        raise _Usage(f"--write takes FORMAT=PATH with a format of {', '.join(FORMATS)}, not {text!a}")
    return form, path


def _folder(parsed: argparse.Namespace) -> Path:
    from pathlib import Path  # noqa: PLC0415  # --help does without

    return Path(parsed.folder)


def _policy_path(parsed: argparse.Namespace) -> str | None:
    """The policy as a path relative to the folder, which is how it can also be read at a revision."""
    if parsed.policy is None:
        return None
    relative: str = os.path.relpath(parsed.policy, parsed.folder)
    return relative.replace(os.sep, "/")


def _write(path: str, text: str) -> None:
    if path == "-":
        _tell(text)
        return
    from pathlib import Path  # noqa: PLC0415  # --help does without

    try:
        Path(path).write_bytes(text.encode("utf-8"))
    except OSError as error:
        raise _Usage(f"cannot write {path!a}: {error.strerror}") from None


def _width() -> int:
    if not sys.stdout.isatty():
        return _WIDTH
    return max(40, min(_WIDEST, os.get_terminal_size(sys.stdout.fileno()).columns))


def _tell(text: str) -> None:
    sys.stdout.write(text)


def _complain(sentence: str) -> None:
    sys.stderr.write(f"gatecheck: {sentence}\n")
