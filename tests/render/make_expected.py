"""Write the expected texts of the sample verdicts anew; look at the difference before you commit it.

Run `python tests/render/make_expected.py` after a format changed on purpose.
"""

from __future__ import annotations

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

from render.sample_verdicts import BY_NAME, DRAINAGE, FALLS_SHORT  # found by the path set above

from gatecheck.render import RENDERERS, account, explain

EXPECTED = Path(__file__).parent / "expected"
ENDINGS = {
    "summary": "md",
    "annotations": "txt",
    "azure-annotations": "txt",
    "sarif": "json",
    "junit": "xml",
    "junit-strict": "xml",
    "code-quality": "json",
    "tap": "txt",
}


def texts() -> dict[str, str]:
    """Every expected text by the name of its file."""
    made = {"explain-drainage.txt": explain(FALLS_SHORT, DRAINAGE.id, 80)}
    for name, verdict in BY_NAME.items():
        made |= {f"account-{name}-{width}.txt": account(verdict, width) for width in (80, 140)}
        for form, ending in ENDINGS.items():
            made[f"{form}-{name}.{ending}"] = RENDERERS[form](verdict)
    return made


if __name__ == "__main__":
    for file, text in texts().items():
        if (EXPECTED / file).exists():
            (EXPECTED / file).write_text(text, encoding="utf-8")
