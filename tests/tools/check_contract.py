#!/usr/bin/env python3
"""What the tree must look like: nothing unexpected at the top, no path of one machine, no registry's host, no file
that does too many things, no note of unfinished work.

    check_contract.py ROOT
"""
import re
import shutil
import subprocess
import sys
from pathlib import Path

TOP = {"README.md", "DEVELOPERS.md", "LICENSE", "CMakeLists.txt", "libstub", "bindings", "examples", "tests", "docs"}
NEEDED = ["README.md", "DEVELOPERS.md", "LICENSE", "CMakeLists.txt", "examples/run.sh", "tests/run.sh", ".ci/run"]
LONGEST = 900       # lines of a source file
TOUR = 1000         # lines of the public header, which is read from top to bottom
BAD = [
    ("a path of one machine", re.compile(r"(^|[^A-Za-z0-9_./-])/(work|root|farm|home|tmp)/")),
    ("a package registry's host", re.compile(r"pypi\.org|pythonhosted\.org|luarocks\.org|deb\.debian\.org|"
                                             r"crates\.io|npmjs\.(com|org)|proxy\.golang\.org|conda\.anaconda\.org")),
    ("unfinished work", re.compile(r"\b(TO" r"DO|FIX" r"ME)\b")),
]


def tracked(root):
    """Files under version control; those of the tree where git is not there or knows nothing (an unpacked archive)."""
    if shutil.which("git"):
        run = subprocess.run(["git", "-C", root, "ls-files", "-z"], capture_output=True, text=True)
        if run.returncode == 0 and run.stdout:
            return [name for name in run.stdout.split("\0") if name]
    skip = re.compile(r"(^|/)(\.git|\.venv|build[^/]*|out|__pycache__|[^/]*\.egg-info)(/|$)")
    names = (str(p.relative_to(root)) for p in Path(root).rglob("*") if p.is_file())
    return [name for name in names if not skip.search(name)]


def main(root):
    names = tracked(root)
    top = {name.split("/")[0] for name in names}
    wrong = [f"{name}: nothing of this name belongs at the top" for name in sorted(top - TOP) if name[0] != "."]
    wrong += [f"{name}: missing" for name in NEEDED if not (Path(root) / name).exists()]
    for name in sorted(names):
        path = Path(root) / name
        if not path.is_file():
            continue
        try:
            lines = path.read_text(encoding="utf-8").splitlines()
        except UnicodeDecodeError:
            continue                                    # a picture or an archive
        most = TOUR if name == "libstub/include/libstub.h" else LONGEST
        if path.suffix in (".c", ".h", ".py", ".lua") and len(lines) > most:
            wrong.append(f"{name}: {len(lines)} lines, {most} at most")
        for number, line in enumerate(lines, 1):
            wrong += [f"{name}:{number}: {what}" for what, pattern in BAD if pattern.search(line)]
    print("\n".join(wrong + [f"{len(names)} files, {len(wrong)} wrong"]))
    return 1 if wrong or not names else 0


if __name__ == "__main__":
    sys.exit(main(str(Path(sys.argv[1]).resolve())))
