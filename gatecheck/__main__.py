"""Run the command as `python -m gatecheck`."""

from gatecheck.cli import run

run()
