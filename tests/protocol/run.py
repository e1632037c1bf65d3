#!/usr/bin/env python3
"""Protocol sessions against the program: run.py PROGRAM [--only WORD]"""

import pathlib
import sys
import time
import traceback

sys.path.insert(0, str(pathlib.Path(__file__).resolve().parent))

import burst
import diagnostics
import editors
import features
import lifecycle
import searches
import session
import texts


def main():
    session.PROGRAM, *rest = sys.argv[1:]
    only = rest[1] if rest[:1] == ["--only"] else ""
    passed = failed = 0
    for module in (lifecycle, texts, diagnostics, features, editors, searches, burst):
        for name, test in list(vars(module).items()):
            if not name.startswith("test_") or only not in f"{module.__name__}.{name}":
                continue
            begin = time.monotonic()
            try:
                test()
                passed += 1
                mark, why = "PASS", ""
            except Exception as error:
                failed += 1
                frame = traceback.extract_tb(error.__traceback__)
                own = [f for f in frame if f.filename.endswith(f"{module.__name__}.py")]
                where = f" at line {own[-1].lineno}" if own else ""
                mark, why = "FAIL", f"{where}: {type(error).__name__} {str(error)[:1500]}"
            print(f"{mark} {module.__name__}: {name[5:].replace('_', ' ')} ({time.monotonic() - begin:.1f} s){why}", flush=True)
    print(f"{passed} passed, {failed} failed")
    return int(failed > 0 or passed == 0)


if __name__ == "__main__":
    sys.exit(main())
