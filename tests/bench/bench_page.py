"""Weigh and time the page: `PYTHONPATH=. python tests/bench/bench_page.py` from the root.

For 100 claims of which 20, or all, are short by two rules, and for 5,000 claims, it prints what the page weighs,
how long it takes to write, and in headless Chromium (of several times the shortest, in milliseconds) when something
is first painted, when all of it is loaded, and how long one move of the slider takes.
"""

from __future__ import annotations

import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

from browser.browsing import opened, running_browser  # found by the path set above
from playwright.sync_api import Browser
from render.page_samples import judged_strips

from gatecheck.render import RENDERERS

SIZES = ((100, 0.2), (100, 1.0), (5000, 0.05))
RUNS = 5
MOST_CLAIMS_WEIGHED, MOST_KILOBYTES = 100, 150
MOST_FOR_OPENING = 1000
#: A function that the browser calls: the page's own policy of content forbids to evaluate a text.
TIMES = """() => new Promise((done) => {
  const told = () => {
    const [whole] = performance.getEntriesByType("navigation"), [paint] = performance.getEntriesByType("paint");
    if (paint && whole.loadEventEnd) done([paint.startTime, whole.loadEventEnd]);
    else setTimeout(told, 10);
  };
  told();
})"""
MOVE = """async () => {
  const slide = document.getElementById("slide"), start = performance.now();
  slide.value = 0.3;
  slide.dispatchEvent(new Event("input"));
  await new Promise((done) => requestAnimationFrame(() => setTimeout(done)));
  return performance.now() - start;
}"""


def open_and_move(browser: Browser, target: Path) -> tuple[float, float, float]:
    """Open the page, and move its slider once: when it is painted and loaded, and how long the move takes."""
    with opened(browser, target) as page:
        paint, loaded = page.evaluate(TIMES)
        return paint, loaded, page.evaluate(MOVE)


def main() -> None:
    """Measure, and print."""
    with tempfile.TemporaryDirectory() as name, running_browser() as browser:
        for claims, short in SIZES:
            verdict = judged_strips(Path(name) / f"{claims}-{short}", claims, short)
            start = time.perf_counter()
            text = RENDERERS["page"](verdict)
            taken = time.perf_counter() - start
            target = Path(name) / "verdict.html"
            target.write_text(text, encoding="utf-8")
            most = f" (at most {MOST_KILOBYTES} kB)" if claims <= MOST_CLAIMS_WEIGHED else ""
            sys.stdout.write(
                f"{claims} claims, {short:.0%} short: {len(text.encode()) / 1000:.1f} kB{most}, "
                f"written in {taken:.2f} s\n"
            )
            times = [open_and_move(browser, target) for _ in range(RUNS)]
            paint, loaded, moved = (min(each) for each in zip(*times, strict=True))
            sys.stdout.write(
                f"  painted after {paint:.0f} ms, loaded after {loaded:.0f} ms (at most {MOST_FOR_OPENING}), "
                f"slider {moved:.0f} ms\n"
            )


if __name__ == "__main__":
    main()
