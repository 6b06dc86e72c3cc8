#!/usr/bin/env python3
"""Include-direction check: each layer of libstub/ includes only itself and what stands left of it.

    check_layers.py ROOT
"""
import re
import sys
from pathlib import Path

LAYERS = ["base", "num", "material", "network", "touchstone", "measure", "stackup", "via", "model", "criteria", "plan"]
READER = "ipc2581"
# C99, less what the library must not use: complex.h (not needed), signal.h, setjmp.h, time.h, and locale.h but for base,
# which takes the decimal point out of messages.
STANDARD = {"ctype.h", "errno.h", "float.h", "inttypes.h", "limits.h", "math.h", "stdarg.h", "stdbool.h", "stddef.h",
            "stdint.h", "stdio.h", "stdlib.h", "string.h"}
READER_ONLY = {"expat.h", "zlib.h", "fcntl.h", "unistd.h", "sys/stat.h", "sys/types.h", "io.h"}
INCLUDE = re.compile(r'^\s*#\s*include\s*([<"])([^>"]+)[>"]')


def allowed(layer, quoted, name):
    if not quoted:
        return name in STANDARD or (layer == READER and name in READER_ONLY) or (layer == "base" and name == "locale.h")
    if name == "libstub.h":
        return True
    if layer == READER:
        return name == "libstub_ipc2581.h" or name.split("/")[0] in ("base", READER)
    return name.split("/")[0] in LAYERS[: LAYERS.index(layer) + 1]


def main(root):
    wrong, files = [], 0
    core = Path(root) / "libstub"
    for layer in LAYERS + [READER]:
        for path in sorted((core / layer).glob("*.[ch]")):
            files += 1
            for number, line in enumerate(path.read_text(encoding="utf-8").splitlines(), 1):
                match = INCLUDE.match(line)
                if match and not allowed(layer, match[1] == '"', match[2]):
                    wrong.append(f"{path.relative_to(root)}:{number}: {layer} must not include {match[2]}")
    strangers = {p.name for p in core.iterdir()} - set(LAYERS) - {READER, "include", "abi", "cmake"}
    wrong += [f"libstub/{name}: no layer of this name" for name in sorted(strangers)]
    print("\n".join(wrong + [f"{files} files, {len(wrong)} wrong"]))
    return 1 if wrong or files == 0 else 0


if __name__ == "__main__":
    sys.exit(main(Path(sys.argv[1]).resolve()))
