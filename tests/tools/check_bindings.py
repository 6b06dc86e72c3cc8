#!/usr/bin/env python3
"""Every function of the library is bound in Python and in Lua, under its own name, or left out for a reason given here.

    check_bindings.py ROOT
"""
import re
import sys
from pathlib import Path

LEFT_OUT = {
    "lstub_init": "the bindings' records start at zero by themselves",
}


def main(root):
    root = Path(root)
    functions = [n for name in ("libstub", "libstub_ipc2581") for n in (root / "libstub/abi" / f"{name}.syms").read_text().split()]
    wrong = []
    for language in ("python", "lua"):
        source = "\n".join(p.read_text(encoding="utf-8") for p in sorted((root / "bindings" / language / "src").glob("*.[ch]")))
        source = re.sub(r"/\*.*?\*/|//[^\n]*", "", source, flags=re.S)
        words = set(re.findall(r"\w+", source))
        for name in functions:      # formulas are bound by a macro that puts the prefix before the name
            if name not in words and name.removeprefix("lstub_") not in words and name not in LEFT_OUT:
                wrong.append(f"{language}: {name} is not bound")
    wrong += [f"{name} is left out, but there is no such function" for name in LEFT_OUT if name not in functions]
    print("\n".join(wrong + [f"{len(functions)} functions, {len(wrong)} complaints"]))
    return 1 if wrong or not functions else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1]))
