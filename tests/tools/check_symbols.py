#!/usr/bin/env python3
"""Compares what a shared library exports, what its header declares and the list in libstub/abi/; and looks that it
calls nothing a library must not call.

    check_symbols.py LIBRARY.so HEADER.h LIST.syms [--refresh]
"""
import re
import subprocess
import sys
from pathlib import Path

# Nothing that prints, ends the program, reads its environment, depends on the locale or keeps hidden state.
FORBIDDEN = {"printf", "puts", "putchar", "fputs", "perror", "vprintf", "stdout", "stderr", "abort", "exit", "_exit",
             "__assert_fail", "setlocale", "strtod", "atof", "sscanf", "__isoc99_sscanf", "strtok", "rand", "srand",
             "getenv", "time", "clock", "signal", "pthread_create"}


def symbols(library, option):
    out = subprocess.run(["nm", "-D", option, library], check=True, capture_output=True, text=True).stdout
    names = [line.split()[-1].split("@")[0] for line in out.splitlines() if line.strip()]
    return {n for n in names if not n.startswith("LIBSTUB_")}     # the version nodes themselves


def main(library, header, listing, *options):
    text = re.sub(r"/\*.*?\*/", "", Path(header).read_text(encoding="utf-8"), flags=re.S)
    declared = set(re.findall(r"LSTUB_API[^;(]*?\b(lstub_\w+)\s*\(", text))
    exported = symbols(library, "--defined-only")
    if "--refresh" in options:
        Path(listing).write_text("".join(f"{n}\n" for n in sorted(exported)), encoding="utf-8")
    listed = set(Path(listing).read_text(encoding="utf-8").split())
    wrong = [f"exported, but not in the list: {n}" for n in sorted(exported - listed)]
    wrong += [f"in the list, but not exported: {n}" for n in sorted(listed - exported)]
    wrong += [f"declared in the header, but not exported: {n}" for n in sorted(declared - exported)]
    wrong += [f"exported, but not declared in the header: {n}" for n in sorted(exported - declared)]
    if wrong:
        wrong.append("If the change is meant (a symbol that was released may never go): "
                     "tests/tools/check_symbols.py LIBRARY HEADER LIST --refresh, and commit the list.")
    wrong += [f"calls {n}, which a library must not" for n in sorted(symbols(library, "--undefined-only") & FORBIDDEN)]
    print("\n".join(wrong + [f"{len(exported)} symbols, {len(wrong)} complaints"]))
    return 1 if wrong or not declared else 0


if __name__ == "__main__":
    sys.exit(main(*sys.argv[1:]))
