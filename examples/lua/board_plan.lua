-- From a board file to a back-drill plan:   lua board_plan.lua BOARD.xml[.gz] RULES.txt OUTDIR
--
-- Prints a summary; writes plan.csv, drill_table.csv and the board with Backdrill specifications into OUTDIR.
local ls = require "libstub"

local function must(value, message, code)
    if value == nil then
        io.stderr:write(string.format("board_plan: %s (%s)\n", message, ls.status_name(code)))
        os.exit(1)
    end
    return value
end

if #arg ~= 3 or arg[3] == "" then
    io.stderr:write("usage: board_plan.lua BOARD.xml[.gz] RULES.txt OUTDIR\n")
    os.exit(1)
end
local path, rules_path, out = arg[1], arg[2], arg[3]
local plan_csv, drill_csv = out .. "/plan.csv", out .. "/drill_table.csv"
local copy = out .. "/backdrilled_" .. path:match("[^/]*$")

io.stderr:write(string.format("rules %s\n", rules_path))
local rules = must(ls.rules_load(rules_path))
local tenths = 0
io.stderr:write(string.format("reading %s:", path))
local board, message, code = ls.board_load(path, { rules = rules, progress = function(fraction)
    while tenths < 10.0 * fraction // 1 do
        tenths = tenths + 1
        io.stderr:write(string.format(" %d%%", 10 * tenths))
    end
end })
io.stderr:write("\n")
must(board, message, code)
io.stderr:write(string.format("planning %d holes\n", board:hole_count()))
local plan = must(board:plan(rules))
io.write(must(board:summary(plan)))
io.flush()

io.stderr:write(string.format("writing %s, %s, %s\n", plan_csv, drill_csv, copy))
must(board:write_plan_csv(plan, plan_csv))
must(board:write_drill_csv(plan, drill_csv))
must(board:write(plan, copy))
io.write(string.format("\nrules: %s\nwritten: %s\n         %s\n         %s\n", rules_path, plan_csv, drill_csv, copy))
