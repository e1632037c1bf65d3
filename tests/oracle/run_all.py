"""Runs every oracle check against the program.

    run_all.py PROGRAM [--only NAME]...

Prints the failures and one line per check, at the end `N passed, N failed`. A check whose packages are missing prints
`not run: …`; with LEASTWISE_REQUIRE_ALL=1 that is a failure. The packages are in requirements.txt.
"""
import argparse
import importlib
import importlib.util
import os
import sys
import time

CHECKS = {                 # module: packages
    "examples": ["sympy", "mpmath"],
    "random_lagrangians": ["sympy", "mpmath"],
    "motions": ["scipy", "numpy", "mpmath"],
    "textbook": ["mpmath"],
    "gauges": ["sympy", "mpmath"],
    "hostile": ["mpmath"],
    "verdicts": ["mpmath"],
    "reprint": ["mpmath"],
    "units": ["pint", "scipy", "mpmath"],
}


def main():
    ap = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    ap.add_argument("program")
    ap.add_argument("--only", action="append", choices=list(CHECKS))
    o = ap.parse_args()
    passed = failed = 0
    for name, packages in CHECKS.items():
        if o.only and name not in o.only:
            continue
        missing = [p for p in packages if importlib.util.find_spec(p) is None]
        if missing:
            print(f"not run: {name} (needs {', '.join(missing)})")
            failed += os.environ.get("LEASTWISE_REQUIRE_ALL") == "1"
            continue
        begin = time.monotonic()
        good, bad = importlib.import_module(name).main([o.program])
        print(f"{name}: {good} passed, {bad} failed, in {time.monotonic() - begin:.0f} s", flush=True)
        passed, failed = passed + good, failed + bad
    print(f"{passed} passed, {failed} failed")
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main())
