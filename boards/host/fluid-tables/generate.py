"""Makes the fluid tables of the library from published formulations.

    python -m venv somewhere && somewhere/bin/pip install -r requirements.txt
    somewhere/bin/python generate.py            writes src/fluid/catalogue/*.rs and tests/published/formulation/*.csv
    somewhere/bin/python generate.py --check    computes them again and fails where a file differs

First printed_checks.py holds the property library against values printed in the papers; a library that misses one
stops everything. catalogue.py lists the fluids with their boxes, scales and uncertainties and says which of those
numbers are from memory, noble.py the viscosities the library lacks, states.py what counts as the formulation,
fit.py and tables.py how the curves are made. Nodes are single-precision numbers, printed so that they read back
exactly. The tables depend on the machine's linear algebra in the last digits, so --check compares numbers to 1e-6 of
the largest one in their line (coefficients of p^2 and p^3 to 1e-4) and everything else exactly.
"""

import os
import pathlib
import sys

# Before numpy is loaded: the order of its sums must not depend on the machine's cores.
os.environ.setdefault("OMP_NUM_THREADS", "1")
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import catalogue
import emit
import printed_checks
import tables

ROOT = pathlib.Path(__file__).resolve().parents[3]
ALLOWED_PPM = 20.0


def texts():
    """{path: text} of every generated file."""
    made = {}
    for fluid in catalogue.FLUIDS:
        table = tables.build(fluid)
        print(f"{fluid.name:20s} worst error {table.residual_viscosity:6.2f} ppm viscosity, "
              f"{table.residual_density:6.2f} ppm density, scale {table.scale:.6f}")
        assert max(table.residual_viscosity, table.residual_density) < ALLOWED_PPM, fluid.name
        module = emit.module_name(fluid)
        made[ROOT / "src/fluid/catalogue" / f"{module}.rs"] = emit.rust(table)
        made[ROOT / "tests/published/formulation" / f"{module}.csv"] = emit.points(table)
    return made


def main(arguments):
    if arguments not in ([], ["--check"]):
        print(__doc__)
        return 2
    print(f"{printed_checks.assert_all()} printed values reproduced")
    failed = 0
    for path, text in texts().items():
        name = path.relative_to(ROOT)
        if not arguments:
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_text(text)
            continue
        for difference in emit.differences(path.read_text() if path.exists() else None, text):
            failed += 1
            print(f"{name}: {difference}")
    if failed:
        print("the files and the generator disagree: run generate.py without --check, or undo the edit")
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
