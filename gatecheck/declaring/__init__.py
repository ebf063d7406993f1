"""How analysis code emits a result record: `declare`, adapters for results of common libraries, display."""

from gatecheck.declaring.emit import Declared, declare
from gatecheck.declaring.errors import DeclareError

__all__ = ["DeclareError", "Declared", "declare"]
