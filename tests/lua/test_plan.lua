-- Plans: decisions, drill table, totals, words.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local fixture = require "fixture"

local board = fixture.stackup()
local link, limits, fab = { symbol_rate = ls.gbd(25.78125) }, fixture.criteria, fixture.capability
local jobs = {
  { via = fixture.via(board), signal = link, criteria = limits },
  { via = fixture.via(board), signal = { symbol_rate = 1e9 }, criteria = limits },
  { via = fixture.via(board) },
  { via = fixture.via(board, { connects = { "TOP", "BOTTOM" } }), signal = link, criteria = limits },
  { via = fixture.via(board, { connects = { "SIG2", "BOTTOM" } }), signal = link, criteria = limits },
  { via = fixture.via(board, { connects = { "SIG1", "SIG2" } }), signal = { symbol_rate = 38e9 }, criteria = limits },
  { via = fixture.via(board), signal = link, criteria = limits },
  { via = fixture.via(board, { pin = { side = "bottom", length = ls.mm(1.2) } }), signal = link, criteria = limits },
  { via = fixture.via(board, { connects = { "TOP" } }), signal = link, criteria = limits },
  { via = fixture.via(board), signal = { symbol_rate = 0 }, criteria = limits },
}
local plan = assert(ls.plan(board, jobs, fab))
t.equal(#plan, #jobs)
t.equal(plan:count(), #jobs)
t.check(tostring(plan):find("^libstub.plan: 10 vias, %d+ drill groups$"))

local function is(i, action, reason)
  local d = plan:decision(i)
  t.equal(d.action, action, "via " .. i)
  t.equal(d.reason, reason, "via " .. i)
  return d
end
local d = is(1, "drill_bottom", "fails")
t.equal(d.reason_side, "bottom")
t.equal(d.bottom.drilled, true)
t.equal(d.top.drilled, false)
t.equal(d.top.depth, nil)
t.equal(d.bottom.must_not_cut, "SIG1")
t.close(d.bottom.diameter, 0.45e-3, 1e-12)
t.close(d.bottom.depth + d.bottom.residual, d.stub_bottom, 1e-12)
t.check(d.bottom.depth_least <= d.bottom.depth and d.bottom.depth <= d.bottom.depth_most)
t.check(d.bottom.residual_most <= d.bottom.limit + 1e-9 and d.bottom.residual_least >= fab.cut_clearance - 1e-9)
t.equal(d.before.pass, false)
t.equal(d.after.pass, true)
t.equal(d.stub_count, 1)
t.equal(d.stub_top, 0.0)
d = is(2, "keep", "passes")
t.equal(d.bottom.drilled, false)
t.equal(d.after.f1, d.before.f1)
d = is(3, "not_judged", "no_signal")
t.equal(d.before, nil)
t.check(d.stub_bottom > 0)
is(4, "keep", "no_stub")
is(5, "drill_top", "fails")
d = is(6, "drill_both", "fails")
t.equal(d.reason_side, "both")
t.equal(d.top.must_not_cut, "SIG1")
t.equal(d.bottom.must_not_cut, "SIG2")
t.equal(plan:decision(7).bottom.depth, plan:decision(1).bottom.depth)
d = is(8, "cannot", "pin")
t.check(d.reason_value < d.reason_limit and d.reason_side == "bottom")
d = is(9, "not_judged", "one_layer")
t.equal(d.reason_layer, "TOP")
d = is(10, "refused", "error")
t.equal(d.status, ls.E_ARGUMENT)
t.equal(d.before, nil)
for i = 1, #plan do
  local reason = plan:reason(i)
  t.check(type(reason) == "string" and #reason > 0)
end
t.check(plan:reason(1):find("drill from the bottom", 1, true) and plan:reason(1):find("SIG1", 1, true), plan:reason(1))
t.check(plan:reason(10):find("symbol_rate = 0", 1, true), plan:reason(10))

-- The drill table accounts for every hole drilled.
local groups, hits = plan:groups(), 0
t.equal(#groups, plan:group_count())
for i, group in ipairs(groups) do
  local again = plan:group(i)
  for key, value in pairs(group) do t.equal(again[key], value, key) end
  hits = hits + group.hits
  t.equal(group.from_layer, group.side == "top" and "TOP" or "BOTTOM")
  t.equal(group.tolerance, fab.depth_tolerance)
end
t.equal(hits, 5)
local row = groups[plan:decision(1).bottom.group]
t.equal(row.must_not_cut, "SIG1")
t.equal(row.depth, plan:decision(1).bottom.depth)

local s = plan:totals()
t.equal(s.vias, 10)
t.equal(s.not_judged + s.keep + s.drill_top + s.drill_bottom + s.drill_both + s.cannot + s.refused, 10)
t.equal(s.drill_bottom, 2)
t.equal(s.drill_both, 1)
t.equal(s.groups, #groups)
t.check(s.geometries < 10 and s.depths_bottom >= 1 and s.worst_added_loss_db > 0)

-- The plan needs nothing it was made from.
jobs = nil
board:close()
collectgarbage()
t.equal(plan:decision(1).bottom.must_not_cut, "SIG1")

board = fixture.stackup()
t.equal(#assert(ls.plan(board, {}, fab)), 0)
local one = { { via = fixture.via(board), signal = link, criteria = limits } }
local only_top = { sides = "top" }
for key, value in pairs(fab) do only_top[key] = value end
t.equal(ls.plan(board, one, only_top):decision(1).reason, "side")
local fixed = { depths = ls.array { ls.mm(0.4), ls.mm(0.95) }, tolerance_method = "rss" }
for key, value in pairs(fab) do fixed[key] = value end
t.equal(ls.plan(board, one, fixed):decision(1).bottom.depth, ls.mm(0.95))
t.check(ls.plan(board, one, fab, { fidelity = "bulk" }):decision(1).before.f1 > ls.plan(board, one, fab):decision(1).before.f1)

-- Refused and wrong.
t.fails("via 11: must be 1 to 10", ls.E_NONE, plan:decision(11))
t.fails("via 0: must be 1 to 10", ls.E_NONE, plan:reason(0))
t.fails("group 99: must be 1 to", ls.E_NONE, plan:group(99))
t.fails("depth_tolerance = -1 m", ls.E_ARGUMENT, ls.plan(board, one, { depth_tolerance = -1 }))
t.fails("depths[2]", ls.E_ARGUMENT, ls.plan(board, one, { depths = { 1e-3, -1 } }))
t.raises("unknown key 'tolerance'; allowed: sides, tolerance_method,", ls.plan, board, one, { tolerance = 1 })
t.raises("sides: 'left' is not one of: top, bottom, both", ls.plan, board, one, { sides = "left" })
t.raises("depths: list of numbers or libstub.array expected, got number", ls.plan, board, one, { depths = 1 })
t.raises("table expected, got nil", ls.plan, board, one)
t.raises("jobs[1]: missing key 'via'", ls.plan, board, { {} }, fab)
t.raises("jobs[1]: missing key 'criteria'", ls.plan, board, { { via = fixture.via(board), signal = link } }, fab)
t.raises("jobs[1]: unknown key 'net'; allowed: via, signal, criteria", ls.plan, board, { { net = "A" } }, fab)
t.raises("jobs[1].via: libstub.via expected, got libstub.stackup", ls.plan, board, { { via = board } }, fab)
t.raises("jobs[1].via: made on another stackup", ls.plan, fixture.stackup(), one, fab)
t.raises("jobs[1].signal.levels: integer expected, got 2.5", ls.plan, board,
  { { via = fixture.via(board), signal = { symbol_rate = 1e9, levels = 2.5 }, criteria = limits } }, fab)
t.raises("jobs[2]: table expected, got nil", ls.plan, board, { one[1], nil, one[1] }, fab)

-- Words.
t.equal(ls.action_name("drill_bottom"), "drill bottom")
t.equal(ls.reason_name("limit_too_short"), "limit too short")
t.raises("'dig' is not one of: not_judged, keep,", ls.action_name, "dig")
t.raises("string expected, got number", ls.reason_name, 3)

t.done()
