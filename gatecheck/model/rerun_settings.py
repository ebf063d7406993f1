"""What a policy says of rerunning: what is run, for how long, and when two numbers are the same."""

from __future__ import annotations

from typing import Annotated

from gatecheck.model.marks import OneOrMore, Range
from gatecheck.model.record import Text
from gatecheck.model.struct import struct

_Tolerance = Annotated[float, Range(0, 1, high_open=True)]
#: A week at most.
_Minutes = Annotated[float, Range(0, 7 * 24 * 60, low_open=True)]


@struct
class RerunSettings:
    """What `gatecheck rerun` runs; no other command runs anything."""

    run: Annotated[
        tuple[Text, ...],
        OneOrMore(least=0),
        "paths or globs of notebooks (.ipynb) and scripts (.py, .R), in the order in which they run",
    ] = ()
    tolerance: Annotated[_Tolerance, "two numbers are the same up to this relative difference"] = 1e-9
    minutes: Annotated[_Minutes, "time limit of each notebook or script, in minutes"] = 10.0
