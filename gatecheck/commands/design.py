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
        parsed.test, parsed.effect, parsed.assurance, parsed.prior, parsed.family, parsed.looks, parsed.boundary
    )
    tell(told(design(asked, readable_policy(parsed)), width()))
    return Exit.STANDS
