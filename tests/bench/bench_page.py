"""Time how the page of 5,000 claims opens: `PYTHONPATH=. python tests/bench/bench_page.py` from the root.

It prints what the page weighs, how long it takes to write, and in headless Chromium (three times, in milliseconds)
when something is first painted, when all of it is loaded, and how long one move of the slider takes.
"""

from __future__ import annotations

import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

from browser.browsing import opened, running_browser  # found by the path set above
from playwright.sync_api import Browser
from render.page_samples import judged_station, many

from gatecheck.render import RENDERERS

SIZES = ((100, 0.2), (5000, 0.05))
RUNS = 3
MOST_FOR_OPENING = 1000
TIMES = """() => {
  const [whole] = performance.getEntriesByType("navigation"), [paint] = performance.getEntriesByType("paint");
  return [paint.startTime, whole.loadEventEnd];
}"""
MOVE = """async () => {
  const slide = document.getElementById("slide"), start = performance.now();
  slide.value = 0.3;
  slide.dispatchEvent(new Event("input"));
  await new Promise((done) => requestAnimationFrame(() => setTimeout(done)));
  return performance.now() - start;
}"""


def open_and_move(browser: Browser, target: Path) -> str:
    """Open the page, move its slider once, and say how long each took."""
    with opened(browser, target) as page:
        page.wait_for_function("performance.getEntriesByType('paint').length > 0")
        paint, loaded = page.evaluate(TIMES)
        moved = page.evaluate(MOVE)
    return (
        f"  painted after {paint:.0f} ms, loaded after {loaded:.0f} ms (at most {MOST_FOR_OPENING}), "
        f"slider {moved:.0f} ms\n"
    )


def main() -> None:
    """Measure, and print."""
    with tempfile.TemporaryDirectory() as name, running_browser() as browser:
        station = judged_station(Path(name) / "station")
        target = Path(name) / "verdict.html"
        for claims, short in SIZES:
            verdict = many(station, claims, short)
            start = time.perf_counter()
            text = RENDERERS["page"](verdict)
            taken = time.perf_counter() - start
            target.write_text(text, encoding="utf-8")
            sys.stdout.write(f"{claims} claims: {len(text.encode()) / 1000:.0f} kB, written in {taken:.2f} s\n")
            sys.stdout.write("".join(open_and_move(browser, target) for _ in range(RUNS)))


if __name__ == "__main__":
    main()
