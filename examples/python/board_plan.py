"""From a board file to a back-drill plan:   python board_plan.py BOARD.xml[.gz] RULES.txt OUTDIR

Prints a summary; writes plan.csv, drill_table.csv and the board with Backdrill specifications into OUTDIR.
"""

import os
import sys

import libstub as ls


def show_progress():
    tenths = 0

    def show(fraction):
        nonlocal tenths
        while tenths < int(10.0 * fraction):
            tenths += 1
            print(" %d%%" % (10 * tenths), end="", file=sys.stderr, flush=True)
    return show


def main(arguments):
    if len(arguments) != 3 or not arguments[2]:
        print("usage: board_plan.py BOARD.xml[.gz] RULES.txt OUTDIR", file=sys.stderr)
        return 1
    path, rules_path, out = arguments
    plan_csv, drill_csv = out + "/plan.csv", out + "/drill_table.csv"
    copy = out + "/backdrilled_" + os.path.basename(path)
    try:
        print("rules %s" % rules_path, file=sys.stderr)
        rules = ls.Rules.load(rules_path)
        print("reading %s:" % path, end="", file=sys.stderr)
        try:
            board = ls.Board.load(path, rules, progress=show_progress())
        finally:
            print(file=sys.stderr)
        print("planning %d holes" % len(board), file=sys.stderr)
        plan = board.plan()
        print(board.summary(plan), end="", flush=True)
        print("writing %s, %s, %s" % (plan_csv, drill_csv, copy), file=sys.stderr)
        board.write_plan_csv(plan, plan_csv)
        board.write_drill_csv(plan, drill_csv)
        board.write(plan, copy)
    except ls.LibstubError as error:
        print("board_plan: %s (%s)" % (error, type(error).__name__), file=sys.stderr)
        return 1
    print("\nrules: %s\nwritten: %s\n         %s\n         %s" % (rules_path, plan_csv, drill_csv, copy))
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
