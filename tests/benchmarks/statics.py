"""How fast beams and trusses are solved (run by hand).

    python tests/benchmarks/statics.py

1,000 beams under 20 combinations against hand-written numpy, and a truss of 2,000 joints against
one scipy.sparse solution of the same matrix.
"""

from __future__ import annotations

import sys

from beam_stacks import beams_vs_numpy
from truss_grid import truss_vs_scipy


def main() -> None:
    """Print one ratio for the truss and one for the beams."""
    for name, measure in (("truss-vs-scipy", truss_vs_scipy), ("beams-vs-numpy", beams_vs_numpy)):
        sys.stdout.write(f"ratio {name} {measure():.4g}\n")


if __name__ == "__main__":
    main()
