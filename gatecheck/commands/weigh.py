"""Command `weigh`: judge every claim."""

from __future__ import annotations

import argparse

from gatecheck.arguments import FORMATS
from gatecheck.commands.edge import bold, folder, policy_path, progress, tell, width, write
from gatecheck.errors import WrongUsage
from gatecheck.gate import Request, check
from gatecheck.render import RENDERERS, account


def act(parsed: argparse.Namespace) -> int:
    """Judge, tell, and return the exit status of the verdict."""
    writes = [_split(each) for each in parsed.write]
    if parsed.only_changed and parsed.base is None:
        raise WrongUsage("--only-changed needs --base: say since which revision")
    with progress() as line:
        request = Request(folder(parsed), policy_path(parsed), parsed.base, parsed.only_changed, progress=line)
        verdict = check(request)
        told = "" if writes else account(verdict, width(), bold=bold())
    tell(told)
    for form, path in writes:
        write(path, RENDERERS[form](verdict))
    return verdict.exit


def _split(text: str) -> tuple[str, str]:
    form, equals, path = text.partition("=")
    if form not in FORMATS or not equals or not path:
        raise WrongUsage(f"--write takes FORMAT=PATH with a format of {', '.join(FORMATS)}, not {text!a}")
    return form, path
