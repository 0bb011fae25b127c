"""Speed, as medians of five, printed: `python tests/benchmark.py`. No test asserts a time."""

import subprocess
import sys
import time
from pathlib import Path
from statistics import median

ROOT = Path(__file__).resolve().parent.parent
sys.path.insert(0, str(ROOT))

from random_designs import first_valid  # noqa: E402

from optics import presets  # noqa: E402
from optics.chain.columns import columns  # noqa: E402
from optics.chain.evaluate import evaluate  # noqa: E402
from optics.report.size import size  # noqa: E402


def timed(action, runs: int = 5) -> float:
    """Median seconds of several runs, after one that does not count."""
    action()
    found = []
    for _ in range(runs):
        start = time.perf_counter()
        action()
        found.append(time.perf_counter() - start)
    return median(found)


def main() -> None:
    designs = first_valid(presets.open("gearbox_tooth").document, 1000)
    table = columns(designs)
    print(f"evaluate, 1,000 distinct designs of mixed forms: {timed(lambda: evaluate(table)):.3f} ms a design")
    print(f"columns of the same: {timed(lambda: columns(designs)):.3f} ms a design")
    one = presets.open("gearbox_tooth").fiberscope
    print(f"size(), one design: {timed(lambda: [size(one) for _ in range(20)]) / 20 * 1000:.1f} ms")
    command = [sys.executable, "-m", "optics", "size", "gearbox_tooth", "--json"]
    cold = timed(lambda: subprocess.run(command, cwd=ROOT, check=True, capture_output=True))
    print(f"the command `size` cold, as a process: {cold:.2f} s")


if __name__ == "__main__":
    main()
