-- Boards: a small one of our own in detail, the project's demo board as a whole.
--     lua5.4 test_board.lua [ROOT of the project]
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local fixture = require "fixture"
local root = arg[1] or t.dir .. "../.."

local path = fixture.write_file(fixture.board_xml())
local rules = assert(ls.rules_parse(fixture.rules))
local fractions = {}
local board = assert(ls.board_load(path, { rules = rules, progress = function(fraction) fractions[#fractions + 1] = fraction end }))
t.equal(board:name(), "SPARROW")
t.equal(board:hole_count(), 6)
t.equal(tostring(board), "libstub.board 'SPARROW': 6 holes")
t.check(#fractions > 0)
for i, fraction in ipairs(fractions) do
  t.check(fraction >= 0 and fraction <= 1 and (i == 1 or fraction >= fractions[i - 1]))
end

local stackup = board:stackup()
t.check(stackup == board:stackup(), "always the same object")
t.equal(#stackup, 7)
t.equal(stackup:layer("GND1").kind, "plane")
t.close(stackup:layer("D3").thickness, 1.2e-3, 1e-12)
t.close(stackup:layer("D3").in_plane_ratio, 1.1, 1e-15)

-- Holes: numbers from 1, names of layers, what is absent.
local holes = board:holes()
t.equal(#holes, 6)
for i, hole in ipairs(holes) do
  local again = board:hole(i)
  for key, value in pairs(hole) do t.equal(again[key], value, key) end
  t.equal(hole.name, "H" .. i)
  t.check(hole.line > 10)
end
t.equal(holes[1].net, "TX_P")
t.equal(holes[1].kind, "via")
t.equal(holes[1].padstack, "VIA")
t.equal(holes[1].signal, 1)
t.equal(holes[1].partner, 2)
t.equal(holes[2].partner, 1)
t.equal(holes[3].signal, nil)
t.equal(holes[3].partner, nil)
t.equal(holes[5].kind, "pin")
t.close(holes[2].x, 11e-3, 1e-12)
t.close(holes[2].y, 10e-3, 1e-12)
t.equal(holes[1].status, ls.OK)

local via = assert(board:via(1))
t.check(via:stackup() == stackup)
t.equal(via:check(), true)
local options = via:options()
t.equal(table.concat(options.connects, " "), "TOP IN1")
t.close(options.drill, 0.25e-3, 1e-12)
t.close(options.pair.pitch, 1e-3, 1e-9)
t.check(options.returns and options.returns.count >= 1)
t.equal(#via:stubs(), 1)
t.close(via:stubs()[1].length, 1.235e-3, 1e-9)
t.check(assert(via:model()):notches(ls.ghz(100))[1].f > 1e9)
t.equal(board:via(5):options().pin.length, 1e-3)

-- A hole that is no via says why; it does not stop a batch or a plan.
t.equal(holes[6].status, ls.E_ARGUMENT)
local lone = assert(board:via(6))
t.fails("connects", ls.E_ARGUMENT, lone:check())
t.fails("connects", ls.E_ARGUMENT, lone:stubs())
t.fails("connects", ls.E_ARGUMENT, lone:model())
t.equal(#lone:options().connects, 0)
t.fails("connects", ls.E_ARGUMENT, ls.via(stackup, lone:options()))
do
  local batch, message, code = ls.first_notch_batch(stackup, { via, lone, via })
  t.equal(code, ls.E_ARGUMENT)
  t.check(message:find("item 2", 1, true) and message:find("connects", 1, true), message)
  t.check(batch.f1[1] == batch.f1[3] and batch.f1[2] ~= batch.f1[2] and batch.status[2] == ls.E_ARGUMENT)
  local made = assert(ls.plan(stackup, { { via = lone, signal = fixture.signal, criteria = fixture.criteria },
    { via = via, signal = fixture.signal, criteria = fixture.criteria } }, fixture.capability))
  t.equal(made:decision(1).action, "refused")
  t.equal(made:decision(1).status, ls.E_ARGUMENT)
  t.check(made:reason(1):find("connects", 1, true), made:reason(1))
  t.check(made:decision(2).action ~= "refused")
end

-- Notices: whatever was settled by a rule.
local notices = board:notices()
t.equal(#notices, board:notice_count())
t.check(#notices > 0)
for i, notice in ipairs(notices) do
  t.check(notice.severity == "note" or notice.severity == "warning" or notice.severity == "refused")
  t.check(notice.count >= 1 and #notice.message > 10)
  t.equal(board:notice(i).message, notice.message)
end
t.fails("notice " .. #notices + 1, ls.E_NONE, board:notice(#notices + 1))

-- The plan, and what is written.
local plan = assert(board:plan(rules))
t.equal(#plan, 6)
t.equal(plan:decision(1).action, "drill_bottom")
t.equal(plan:decision(1).bottom.must_not_cut, "IN1")
t.equal(plan:decision(3).action, "not_judged")
t.check(board:summary(plan):find("SPARROW", 1, true))
local out = os.tmpname()
t.equal(board:write_plan_csv(plan, out), true)
local rows = select(2, t.read(out):gsub("\n", "\n"))
t.check(rows >= 7, rows .. " lines")
t.equal(board:write_drill_csv(plan, out), true)
t.check(t.read(out):find("IN1", 1, true))
t.equal(board:write(plan, out), true)
t.check(t.read(out):find("MUST_NOT_CUT_LAYER", 1, true))
local again = assert(ls.board_load(out, { rules = rules }))
t.equal(again:hole_count(), 6)
again:close()

-- Another capability, other options, no rules at all.
t.equal(board:plan(rules, { sides = "top" }):decision(1).action, "cannot")
t.check(board:plan(rules, nil, { fidelity = "bulk" }):decision(1).before.f1 > plan:decision(1).before.f1)
t.equal(board:plan(nil, fixture.capability):totals().not_judged, 6)
t.check(ls.board_load(path):notice_count() > 0)

-- Files that cannot be written: what stood there still stands.
t.fails("nowhere", ls.E_WRITE, board:write_plan_csv(plan, "/nowhere/plan.csv"))
t.fails("nowhere", ls.E_WRITE, board:write(plan, "/nowhere/board.xml.gz"))
t.check(t.read(out):find("MUST_NOT_CUT_LAYER", 1, true))
os.remove(out)

-- Files that cannot be read, or are no boards.
t.fails("nowhere", ls.E_READ, ls.board_load("/nowhere/board.xml"))
local bad = fixture.write_file(fixture.board_xml():sub(1, 3000))
local _, message, code = ls.board_load(bad)
t.equal(code, ls.E_FORMAT)
t.check(message:find("%d"), message)
os.remove(bad)
t.fails("SPARROW_5", ls.E_NONE, ls.board_load(path, { stackup = "SPARROW_5" }))
t.check(ls.board_load(path, { stackup = "SPARROW_4" }))

-- Wrong calls.
t.fails("hole 7: must be 1 to 6", ls.E_NONE, board:hole(7))
t.fails("hole 0: must be 1 to 6", ls.E_NONE, board:via(0))
t.raises("unknown key 'rule'; allowed: rules, stackup, progress", ls.board_load, path, { rule = rules })
t.raises("rules: libstub.rules expected, got string", ls.board_load, path, { rules = "r.txt" })
t.raises("stackup: string expected, got libstub.stackup", ls.board_load, path, { stackup = stackup })
t.raises("progress: function expected, got number", ls.board_load, path, { progress = 1 })
t.raises("string expected, got no value", ls.board_load)
t.raises("libstub.rules expected, got string", board.plan, board, "rules")
t.raises("capability expected where there are no rules", board.plan, board)
t.raises("libstub.plan expected, got nil", board.summary, board, nil)
t.raises("string expected, got no value", board.write, board, plan)

-- Progress: false gives up, an error comes out as it is, a yield cannot pass.
do
  local calls = 0
  _, message, code = ls.board_load(path, { progress = function() calls = calls + 1 return false end })
  t.equal(_, nil)
  t.equal(calls, 1)
  t.check(type(message) == "string" and code < 0, tostring(message))
  local mark = {}
  local ok, err = pcall(ls.board_load, path, { rules = rules, progress = function() error(mark) end })
  t.check(not ok and err == mark)
  local co = coroutine.create(function() ls.board_load(path, { progress = coroutine.yield }) end)
  ok, err = coroutine.resume(co)
  t.check(not ok and tostring(err):find("yield", 1, true), tostring(err))
  -- the rules are in use while a board is loaded with them; not afterwards
  local own = ls.rules_parse(fixture.rules)
  local tried
  t.check(ls.board_load(path, { rules = own, progress = function() tried = { pcall(own.close, own) } end }))
  t.check(tried[1] == false and tried[2]:find("libstub.rules is in use", 1, true))
  own:close()
  t.equal(tostring(own), "libstub.rules (closed)")
  -- a board loaded while a board is loaded
  local inner
  local outer = ls.board_load(path, { progress = function() inner = inner or ls.board_load(path) end })
  t.equal(inner:hole_count(), outer:hole_count())
end

-- What belongs to a board needs the board; a plan does not, a via knows itself.
do
  local short = assert(ls.board_load(path, { rules = rules }))
  local its_stackup, its_via, its_plan = short:stackup(), short:via(1), short:plan(rules)
  its_stackup:close()
  t.check(short:plan(rules), "closing the stackup object leaves the board as it is")
  short:close()
  short:close()
  t.equal(tostring(short), "libstub.board (closed)")
  t.raises("closed libstub.board", its_via.stubs, its_via)
  t.raises("closed libstub.board", short.holes, short)
  t.equal(its_via:options().connects[2], "IN1")
  t.equal(its_plan:decision(1).bottom.must_not_cut, "IN1")
  local kept = assert(ls.board_load(path)):stackup()
  collectgarbage()
  collectgarbage()
  t.equal(#kept, 7, "a stackup keeps its board alive")
end
os.remove(path)

-- The demo board: the plan of every hole, in the summary and in the file alike.
local demo = root .. "/examples/data/demo_board.xml.gz"
rules = assert(ls.rules_load(root .. "/examples/data/demo_rules.txt"))
board = assert(ls.board_load(demo, { rules = rules }))
plan = assert(board:plan(rules, nil, { fidelity = "ladder" }))
t.equal(#plan, board:hole_count())
local totals, seen = plan:totals(), {}
for i = 1, #plan do
  local d = plan:decision(i)
  seen[d.action] = (seen[d.action] or 0) + 1
  if d.bottom.drilled then t.check(plan:group(d.bottom.group).must_not_cut == d.bottom.must_not_cut) end
end
for _, action in ipairs { "not_judged", "keep", "drill_top", "drill_bottom", "drill_both", "cannot", "refused" } do
  t.equal(seen[action] or 0, totals[action], action)
end
t.check(totals.drill_bottom > 0 and totals.keep > 0)
t.check(board:summary(plan):find("HERON_LINE_CARD", 1, true))

t.done()
