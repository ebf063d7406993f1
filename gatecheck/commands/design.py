"""Command `design`: tell how large a study must be for a true effect to meet the policy."""

from __future__ import annotations

import argparse

from gatecheck.commands.edge import readable_policy, tell, width
from gatecheck.design import design
from gatecheck.model.design import DesignQuestion
from gatecheck.model.exit import Exit
from gatecheck.render import design as told


def act(parsed: argparse.Namespace) -> int:
    """Answer the question about a study that is still to be made."""
    asked = DesignQuestion(
        test=parsed.test,
        effect=parsed.effect,
        assurance=parsed.assurance,
        prior=parsed.prior,
        family=parsed.family,
        looks=parsed.looks,
        boundary=parsed.boundary,
        sides=parsed.sides,
        groups=parsed.groups,
        df=parsed.df,
        ratio=parsed.ratio,
    )
    tell(told(design(asked, readable_policy(parsed)), width()))
    return Exit.STANDS
