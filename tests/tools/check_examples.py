#!/usr/bin/env python3
"""Runs every example in every language it is written in and compares: the same task gives the same bytes.

    check_examples.py ROOT --build DIR [--lua LUA] [--refresh]      (with the Python that has the binding)

C programs are taken from the build, examples/python and examples/lua from the tree. `board_plan` is run on the demo
board, and on the boards of ../shared/boards where that folder is, with the rules that examples/data has for each.
Those of ON_DEMO_BOARD get the demo board and a folder, and leave the files named there and maybe a picture.
Any other example must end well and, with its picture files, leave something behind. The text blocks that examples/README.md
shows in the section of an example are lines of what it prints, in their order; `  ...` stands for lines left out.
--refresh puts what is printed in their place.
"""
import argparse
import difflib
import os
import re
import subprocess
import sys
import tempfile
from pathlib import Path

BOARDS = (("demo_board.xml.gz", "demo_rules.txt"), ("testcase10.xml.gz", "testcase10_rules.txt"))
ON_DEMO_BOARD = {
    "via_sparameters": {"via_as_it_is.s2p", "via_drilled.s2p", "via_without_stub.s2p", "pair_drilled.s4p"},
    "measured_coupon": {f"coupon_{name}.s2p" for name in ("IN1", "IN2", "IN3", "IN5", "IN6", "IN7", "drilled")},
    "pair_skew": {"pair_one_missing.ts"},
}


class Check:
    def __init__(self, args):
        self.args, self.failed, self.count = args, 0, 0
        self.env = dict(os.environ, LUA_CPATH=f"{args.build}/bindings/lua/?.so", LUA_PATH=f"{args.root}/examples/lua/?.lua",
                        MPLBACKEND="Agg", PYTHONDONTWRITEBYTECODE="1")

    def languages(self, name):
        root = self.args.root / "examples"
        found = {}
        if (root / "c" / f"{name}.c").exists():
            found["c"] = [self.args.build / "examples" / name]
        if (root / "python" / f"{name}.py").exists():
            found["python"] = [sys.executable, root / "python" / f"{name}.py"]
        if (root / "lua" / f"{name}.lua").exists():
            found["lua"] = [self.args.lua, root / "lua" / f"{name}.lua"]
        return found

    def tell(self, fine, what):
        self.count += 1
        self.failed += not fine
        print(f"{'ok    ' if fine else 'FAILED'} {what}", flush=True)
        return fine

    def run(self, what, command, folder):
        """Standard output and the files left in `folder`, or None."""
        folder.mkdir()
        done = subprocess.run(command, cwd=folder, env=self.env, stdin=subprocess.DEVNULL, capture_output=True, timeout=500)
        if not self.tell(done.returncode == 0, what):
            sys.stdout.write(done.stdout.decode(errors="replace") + done.stderr.decode(errors="replace"))
            return None
        files = {str(p.relative_to(folder)): p.read_bytes() for p in sorted(folder.rglob("*")) if p.is_file()}
        return done.stdout, files

    def compare(self, what, results):
        """Text and tables of all languages are the same bytes. Pictures are one language's own."""
        first, (text, files) = next(iter(results.items()))
        tables = {n: b for n, b in files.items() if not n.endswith((".png", ".svg"))}
        for language, (other_text, other_files) in results.items():
            if language == first:
                continue
            others = {n: b for n, b in other_files.items() if not n.endswith((".png", ".svg"))}
            self.tell(other_text == text, f"{what}: {language} prints what {first} prints")
            self.tell(sorted(others) == sorted(tables), f"{what}: {language} writes {sorted(others)}, {first} {sorted(tables)}")
            for name in tables.keys() & others.keys():
                self.tell(tables[name] == others[name], f"{what}: {name} of {language} and {first} are the same bytes")

    def example(self, what, name, arguments, scratch):
        results = {}
        for language, command in self.languages(name).items():
            found = self.run(f"{what} in {language}", [*command, *arguments], scratch / f"{what}-{language}".replace(" ", "-"))
            if found is not None:
                results[language] = found
        if results:
            self.compare(what, results)
        return results

    def readme(self, name, results, section=None):
        """Lines that examples/README.md shows in a section are lines of what is printed, in their order."""
        path = self.args.root / "examples" / "README.md"
        text = path.read_text(encoding="utf-8")
        part = re.search(rf"^## {section or name}\n(.*?)(?=^## |\Z)", text, re.M | re.S)
        if not part or not results:
            return
        printed = [line.rstrip() for line in next(iter(results.values()))[0].decode().splitlines()]
        fresh = re.sub(r"(?<=^```text\n).*?(?=^```)", lambda block: as_printed(block[0], printed), part[1], flags=re.M | re.S)
        if fresh != part[1] and self.args.refresh:
            path.write_text(text.replace(part[1], fresh), encoding="utf-8")
        elif "```text" in part[1]:
            self.tell(fresh == part[1], f"{name}: examples/README.md shows what it prints (else --refresh, and look)")


def as_printed(block, printed):
    """A shown block with each line replaced by the printed one most like it, in their order."""
    lines, start = [], 0
    for line in block.splitlines():
        if line.strip() not in ("", "..."):
            exact = line.rstrip() in printed[start:]
            near = [line.rstrip()] if exact else difflib.get_close_matches(line, printed[start:], 1, 0.0)
            line = near[0] if near else "(not printed)"
            start = printed.index(line, start) + 1 if near else start
        lines.append(line + "\n")
    return "".join(lines)


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("root", type=lambda p: Path(p).resolve())
    parser.add_argument("--build", required=True, type=lambda p: Path(p).resolve())
    parser.add_argument("--lua", default="lua5.4")
    parser.add_argument("--refresh", action="store_true")
    args = parser.parse_args()
    check = Check(args)
    data, shared = args.root / "examples" / "data", args.root.parent / "shared" / "boards"
    names = {p.stem for folder in ("c", "python", "lua") for p in (args.root / "examples" / folder).glob("*.*")
             if p.suffix in (".c", ".py", ".lua") and p.stem != "invented"}
    for name in ("board_plan", "max_stub", "stackup_sweep", "via_sparameters"):
        check.tell(set(check.languages(name)) == {"c", "python", "lua"}, f"{name} is there in C, Python and Lua")
    with tempfile.TemporaryDirectory() as folder:
        scratch = Path(folder)
        for board, rules in BOARDS:
            path = data / board if (data / board).exists() else shared / board
            if not path.exists():
                print(f"not run: board_plan on {board}, which is not here")
                continue
            results = check.example(f"board_plan {board}", "board_plan", [path, data / rules, "."], scratch)
            if board == "demo_board.xml.gz":
                check.readme("board_plan", results, "The main job")
            for language, (_, files) in results.items():
                check.tell({"plan.csv", "drill_table.csv"} < set(files) and len(files) == 3, f"{board} in {language}: {sorted(files)}")
        for name, wanted in ON_DEMO_BOARD.items():
            results = check.example(name, name, [data / "demo_board.xml.gz", "."], scratch)
            check.tell({"python", "lua"} <= set(results), f"{name} runs in Python and Lua")
            for language, (_, files) in results.items():
                tables = {file for file in files if not file.endswith(".png")}
                check.tell(tables == wanted, f"{name} in {language}: {sorted(files)}")
            check.readme(name, results)
        for name in sorted(names - {"board_plan", *ON_DEMO_BOARD}):
            results = check.example(name, name, [], scratch)
            check.tell(any(text or files for text, files in results.values()), f"{name} says something")
            check.readme(name, results)
    print(f"{check.count} checks, {check.failed} failed")
    return 1 if check.failed or check.count < 20 else 0


if __name__ == "__main__":
    sys.exit(main())
