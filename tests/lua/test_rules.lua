-- Rules: which net carries what, and what the fabricator can do.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"

local text = [[
signal FAST symbol_rate 53.125 GBd levels 4 notch_over_nyquist 2 added_loss 0.3 dB
signal SLOW symbol_rate 10 GBd notch_over_nyquist 3
net CLK* none
net A?_* FAST
net *    SLOW
fab depth_tolerance 2 mil
fab sides bottom
fab tolerance rss
fab depths 0.5 mm 1 mm
]]
local rules = assert(ls.rules_parse(text))
t.equal(tostring(rules), "libstub.rules: 2 signals")
t.equal(rules:signal_count(), 2)
local name, signal, criteria = rules:signal(1)
t.equal(name, "FAST")
t.equal(signal.symbol_rate, 53.125e9)
t.equal(signal.levels, 4)
t.equal(criteria.notch_over_nyquist, 2.0)
t.equal(criteria.added_loss_db, 0.3)
name, signal, criteria = rules:signal(2)
t.equal(name, "SLOW")
t.equal(signal.levels, 2)
t.equal(criteria.added_loss_db, nil)
t.equal(ls.signal_nyquist(signal), 5e9)

t.equal(rules:match("A1_X"), 1)
t.equal(rules:match("B"), 2)
t.equal(rules:match("CLK7"), nil)
t.equal(select("#", rules:match("CLK7")), 1)

local fab = rules:capability()
t.close(fab.depth_tolerance, 50.8e-6, 1e-12)
t.equal(fab.sides, "bottom")
t.equal(fab.tolerance_method, "rss")
t.equal(fab.residual_min, 0.0)
t.equal(#fab.depths, 2)
t.close(fab.depths[2], 1e-3, 1e-15)
t.equal(assert(ls.rules_parse("")):capability().sides, "both")
t.equal(ls.rules_parse(""):signal_count(), 0)

-- The capability fits into a plan as it comes.
local fixture = require "fixture"
local board = fixture.stackup()
local plan = assert(ls.plan(board, { { via = fixture.via(board), signal = signal, criteria = criteria } }, fab))
t.equal(#plan, 1)

-- A file; and files that are not there or not rules.
local path = os.tmpname()
local file = assert(io.open(path, "w"))
file:write(text)
file:close()
t.equal(assert(ls.rules_load(path)):signal_count(), 2)
file = assert(io.open(path, "w"))
file:write("signal A symbol_rate 1 GBd notch_over_nyquist 2\nsginal B\n")
file:close()
t.fails("line 2", ls.E_FORMAT, ls.rules_load(path))
os.remove(path)
t.fails(path, ls.E_READ, ls.rules_load(path))

-- Lines of a file are counted as editors count them.
t.fails("line 3", ls.E_FORMAT, ls.rules_parse("\n\nsignal x symbol_rate -3 GBd added_loss 1 dB"))
t.fails("line 1", ls.E_FORMAT, ls.rules_parse("net a\0b"))
t.fails("signal 3: must be 1 to 2", ls.E_NONE, rules:signal(3))
t.fails("signal 0: must be 1 to 2", ls.E_NONE, rules:signal(0))
t.raises("string expected, got table", ls.rules_parse, {})
t.raises("string expected, got number", ls.rules_parse, 3)
t.raises("string contains a zero byte", ls.rules_load, "a\0b")
t.raises("string contains a zero byte", rules.match, rules, "a\0b")
t.raises("string expected, got no value", rules.match, rules)

t.done()
