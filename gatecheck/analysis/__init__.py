"""Analysis: the hypothesis tests that Python and R code calls, in files and notebooks. Parsed, never run."""

from gatecheck.analysis.files import read_code

__all__ = ["read_code"]
