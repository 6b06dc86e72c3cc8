#!/usr/bin/env python3
"""Runs the fenced code blocks of README.md, DEVELOPERS.md and docs/*.md, so that they stay true.

    run_snippets.py ROOT --build DIR [--python PYTHON] [--lua LUA] [--cc CC]

c blocks are whole programs: compiled against the build and run. python blocks of one file run as one program, and so do its
lua blocks: what one defines the next may use. sh blocks run one by one. A block after a line
`<!-- not run: reason -->` is left out and counted; other languages (text, xml, cmake ...) are not code to run.
Blocks see the project's folders by their relative names, and write into a folder that goes away.
"""
import argparse
import os
import re
import subprocess
import sys
import tempfile
from pathlib import Path

RUN = ("c", "python", "lua", "sh")
FENCE = re.compile(r"^```\s*(\w*)\s*$")
SKIP = re.compile(r"^<!-- not run: (.+) -->\s*$")


def blocks(path):
    """(language, first line number, text, reason not to run or None) of each fenced block."""
    found, language, start, reason = [], None, 0, None
    lines = path.read_text(encoding="utf-8").splitlines()
    for number, line in enumerate(lines, 1):
        fence = FENCE.match(line)
        if language is None and fence:
            language, start = fence[1], number + 1
        elif language is not None and line.strip() == "```":
            found.append((language, start, "\n".join(lines[start - 1:number - 1]) + "\n", reason))
            language, reason = None, None
        elif language is None and line.strip():
            skip = SKIP.match(line)
            reason = skip[1] if skip else None
    if language is not None:
        raise SystemExit(f"{path}:{start - 1}: a code block without an end")
    return found


def joined(parts):
    """Blocks as one program whose line numbers are those of the file."""
    text, line = "", 1
    for start, block in parts:
        text += "\n" * (start - line) + block
        line = start + block.count("\n")
    return text


class Runner:
    def __init__(self, args, scratch):
        self.args, self.scratch, self.failed, self.count = args, scratch, 0, 0
        build = Path(args.build)
        self.env = dict(os.environ, LD_LIBRARY_PATH=str(build), LUA_CPATH=f"{build}/bindings/lua/?.so;;",
                        LUA_PATH=f"{args.root}/bindings/lua/?.lua;{args.root}/bindings/lua/?/init.lua;;")

    def run(self, what, command):
        self.count += 1
        done = subprocess.run(command, cwd=self.scratch, env=self.env, stdin=subprocess.DEVNULL, capture_output=True,
                              text=True, timeout=300)
        print(f"{'ok    ' if done.returncode == 0 else 'FAILED'} {what}", flush=True)
        if done.returncode != 0:
            self.failed += 1
            print(done.stdout + done.stderr)
        return done.returncode == 0

    def c(self, where, start, text):
        build, root = self.args.build, self.args.root
        source, program = self.scratch / "snippet.c", self.scratch / "snippet"
        source.write_text(f'#line {start} "{where}"\n{text}', encoding="utf-8")
        reader = ["-lstub_ipc2581"] if "libstub_ipc2581.h" in text else []
        if self.run(f"{where}:{start} c, compiled", [self.args.cc, "-std=c99", "-Wall", "-Wextra", "-pedantic", "-Werror",
                    f"-I{root}/libstub/include", source, f"-L{build}", *reader, "-lstub", "-lm", "-o", program]):
            self.run(f"{where}:{start} c, run", [program])

    def file(self, path, where):
        skipped, shared = 0, {"python": [], "lua": []}
        for language, start, text, reason in blocks(path):
            if language not in RUN:
                continue
            if reason is not None:
                print(f"not run {where}:{start} {language}: {reason}")
                skipped += 1
            elif language in shared:
                shared[language].append((start, text))
            elif language == "c":
                self.c(where, start, text)
            else:
                self.run(f"{where}:{start} sh", ["sh", "-eu", "-c", text])
        for language, command in (("python", self.args.python), ("lua", self.args.lua)):
            if shared[language]:
                name = self.scratch / f"{path.stem}.{language}"
                name.write_text(joined(shared[language]), encoding="utf-8")
                self.run(f"{where} {language}, {len(shared[language])} blocks", [command, name])
        return skipped


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("root", type=lambda p: Path(p).resolve())
    parser.add_argument("--build", required=True, type=lambda p: Path(p).resolve())
    parser.add_argument("--python", default=sys.executable)
    parser.add_argument("--lua", default="lua5.4")
    parser.add_argument("--cc", default="cc")
    args = parser.parse_args()
    skipped = 0
    with tempfile.TemporaryDirectory() as folder:
        scratch = Path(folder)
        for path in args.root.iterdir():
            if path.name[0] != "." and not path.name.startswith(("build", "out")):
                (scratch / path.name).symlink_to(path)
        runner = Runner(args, scratch)
        for path in [args.root / "README.md", args.root / "DEVELOPERS.md", *sorted((args.root / "docs").glob("*.md"))]:
            skipped += runner.file(path, path.relative_to(args.root))
    print(f"{runner.count} run, {skipped} not run, {runner.failed} failed")
    return 1 if runner.failed or runner.count == 0 else 0


if __name__ == "__main__":
    sys.exit(main())
