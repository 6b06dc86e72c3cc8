#!/usr/bin/env python3
"""Compares the outputs that README.md and docs/*.md show with what their code prints.

    check_outputs.py --build DIR [--python PYTHON] [--lua LUA] [--cc CC] [--refresh]

In python, lua and c blocks, lines that begin with #> --> or //> are what the code above them prints. A text block after a
line `<!-- lines of: COMMAND -->` shows lines of a command's output, in their order; BUILD in the command is the build folder,
a line `...` stands for lines left out. --refresh puts what was printed in place of the first kind. The blocks run as
tests/tools/run_snippets.py runs them.
"""
import argparse
import os
import re
import subprocess
import sys
import tempfile
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
sys.path.insert(0, str(ROOT / "tests" / "tools"))
sys.dont_write_bytecode = True
import run_snippets  # noqa: E402

MARKS = {"python": "#>", "lua": "-->", "c": "//>"}
SENTINEL = {"python": 'print("\\001{}")', "lua": 'print("\\001{}")', "c": 'printf("\\001{}\\n");'}
LINES_OF = re.compile(r"^<!-- lines of: (.+) -->\s*$")


def marked(text, language, first):
    """The program with a sentinel where each group of shown lines begins, and the groups: line number -> lines."""
    mark, out, groups, current = MARKS[language], [], {}, None
    for number, line in enumerate(text.split("\n"), first):
        bare = line.strip()
        if not bare.startswith(mark):
            out.append(line)
            current = None
            continue
        if current is None:
            current = number
            groups[current] = []
            out.append(line[:len(line) - len(line.lstrip())] + SENTINEL[language].format(number))
        else:
            out.append("")
        groups[current].append(bare[len(mark):].strip())
    return "\n".join(out), groups


def printed(stdout):
    """What stands before each sentinel: line number -> lines."""
    found, lines = {}, []
    for line in stdout.split("\n"):
        if line.startswith("\1"):
            found[int(line[1:])] = lines
            lines = []
        else:
            lines.append(line.rstrip())
    return found


class Checker:
    def __init__(self, args, scratch):
        self.args, self.scratch, self.wrong, self.count = args, scratch, 0, 0
        self.env = dict(os.environ, LD_LIBRARY_PATH=str(args.build), LUA_CPATH=f"{args.build}/bindings/lua/?.so;;",
                        BUILD=str(args.build), OUT=str(scratch))

    def complain(self, text):
        print(text)
        self.wrong += 1

    def run(self, where, command, **more):
        done = subprocess.run(command, cwd=self.scratch, env=self.env, capture_output=True, text=True, timeout=600, **more)
        if done.returncode != 0:
            self.complain(f"{where}: failed\n{done.stdout}{done.stderr}")
            return None
        return done.stdout

    def program(self, path, language, first, text):
        """Runs one program; the groups with what was printed: line number -> (shown, printed)."""
        code, groups = marked(text, language, first)
        if not groups:
            return {}
        where = f"{path.relative_to(ROOT)}:{first} {language}"
        source = self.scratch / f"shown.{language}"
        source.write_text(code, encoding="utf-8")
        if language == "c":
            if self.run(where, [self.args.cc, "-std=c99", f"-I{ROOT}/libstub/include", source, f"-L{self.args.build}",
                                "-lstub_ipc2581", "-lstub", "-lm", "-o", self.scratch / "shown"]) is None:
                return {}
            command = [self.scratch / "shown"]
        else:
            command = [getattr(self.args, language), source]
        stdout = self.run(where, command)
        found = printed(stdout) if stdout is not None else {}
        return {number: (shown, found.get(number, [])) for number, shown in groups.items()}

    def file(self, path):
        shared, groups = {"python": [], "lua": []}, {}
        for language, start, text, reason in run_snippets.blocks(path):
            if language in shared and reason is None:
                shared[language].append((start, text))
            elif language == "c" and reason is None:
                groups.update(self.program(path, "c", start, text))
        for language, parts in shared.items():
            if parts:
                groups.update(self.program(path, language, 1, run_snippets.joined(parts)))
        self.count += len(groups)
        stale = {number: both for number, both in groups.items() if both[0] != both[1]}
        if stale and self.args.refresh:
            self.rewrite(path, stale)
        for number, (shown, found) in sorted(stale.items()):
            text = f"{path.relative_to(ROOT)}:{number}: shows\n  " + "\n  ".join(shown) + "\nbut prints\n  " + "\n  ".join(found)
            print(text if not self.args.refresh else f"{path.relative_to(ROOT)}:{number}: refreshed")
            self.wrong += not self.args.refresh
        self.commands(path)

    def rewrite(self, path, stale):
        lines = path.read_text(encoding="utf-8").split("\n")
        for number, (shown, found) in sorted(stale.items(), reverse=True):
            old = lines[number - 1]
            head = re.match(r"\s*(#>|-->|//>)", old)[0]
            lines[number - 1:number - 1 + len(shown)] = [f"{head} {line}".rstrip() for line in found]
        path.write_text("\n".join(lines), encoding="utf-8")

    def commands(self, path):
        lines, command = path.read_text(encoding="utf-8").splitlines(), None
        for i, line in enumerate(lines):
            match = LINES_OF.match(line)
            command = match[1] if match else command
            if command and line.startswith("```"):
                end = next(k for k in range(i + 1, len(lines)) if lines[k].startswith("```"))
                self.compare(f"{path.relative_to(ROOT)}:{i + 2}", command, lines[i + 1:end])
                command = None

    def compare(self, where, command, shown):
        stdout = self.run(where, ["sh", "-eu", "-c", command])
        if stdout is None:
            return
        self.count += 1
        rest, gap = [line.rstrip() for line in stdout.split("\n")], True
        for line in shown:
            if line.strip() == "...":
                gap = True
                continue
            at = rest.index(line.rstrip()) if line.rstrip() in rest else -1
            if at < 0 or (at > 0 and not gap):
                self.complain(f"{where}: not printed there: {line}")
                return
            rest, gap = rest[at + 1:], False


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("--build", required=True, type=lambda p: Path(p).resolve())
    parser.add_argument("--python", default=sys.executable)
    parser.add_argument("--lua", default="lua5.4")
    parser.add_argument("--cc", default="cc")
    parser.add_argument("--refresh", action="store_true")
    args = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        scratch = Path(folder)
        for name in ("libstub", "bindings", "examples", "tests", "docs"):
            (scratch / name).symlink_to(ROOT / name)
        checker = Checker(args, scratch)
        for path in [ROOT / "README.md", *sorted((ROOT / "docs").glob("*.md"))]:
            if path.exists():
                checker.file(path)
    print(f"{checker.count} outputs compared, {checker.wrong} wrong")
    return 1 if checker.wrong or checker.count == 0 else 0


if __name__ == "__main__":
    sys.exit(main())
