-- Signals, margins, and the inverse questions.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local fixture = require "fixture"

local board = fixture.stackup()
local via = fixture.via(board)
local model = assert(via:model())
local link, limits = fixture.signal, fixture.criteria

t.equal(ls.signal_nyquist(link), 26.5625e9)
t.equal(ls.signal_bit_rate(link), 106.25e9)
t.equal(ls.signal_bit_rate { symbol_rate = 10e9 }, 10e9)
t.fails("levels = 1", ls.E_ARGUMENT, ls.signal_bit_rate { symbol_rate = 1e9, levels = 1 })
t.fails("symbol_rate = 0", ls.E_ARGUMENT, ls.signal_nyquist { symbol_rate = 0 })
t.raises("missing key 'symbol_rate'", ls.signal_nyquist, {})
t.raises("unknown key 'baud'; allowed: symbol_rate, levels", ls.signal_nyquist, { baud = 1e9 })
t.raises("levels: integer expected, got 2.5", ls.signal_nyquist, { symbol_rate = 1e9, levels = 2.5 })

local m = model:margin(link, limits)
t.equal(m.pass, false)
t.equal(m.nyquist, 26.5625e9)
t.close(m.f1, model:notches(1e12)[1].f, 1e-9)
t.close(m.notch_over_nyquist, m.f1 / m.nyquist, 1e-14)
t.close(m.notch_margin, m.f1 - 2 * m.nyquist, 1e-12)
t.close(m.added_loss_db, model:added_loss(m.nyquist), 1e-9)
t.close(m.loss_margin_db, 0.5 - m.added_loss_db, 1e-12)
t.close(m.rule_length, ls.rule_of_thumb_length(106.25e9), 1e-14)
t.close(m.rule_margin, m.rule_length - m.stub_length, 1e-14)
t.close(m.stub_length, via:stubs()[1].length, 1e-14)
t.check(m.limited_by == "notch" or m.limited_by == "loss")

-- What was not asked for is absent; without a stub nothing limits.
m = model:margin({ symbol_rate = 1e9 }, { notch_over_nyquist = 2 })
t.equal(m.pass, true)
t.equal(m.loss_margin_db, nil)
t.equal(m.limited_by, "notch")
m = fixture.via(board, { connects = { "TOP", "BOTTOM" } }):model():margin(link, limits)
t.equal(m.pass, true)
t.equal(m.f1, math.huge)
t.equal(m.limited_by, "none")
t.fails("at least one must be > 0", ls.E_ARGUMENT, model:margin(link, {}))
t.raises("unknown key 'loss'; allowed: notch_over_nyquist, added_loss_db", model.margin, model, link, { loss = 1 })
t.raises("table expected, got no value", model.margin, model, link)

-- The highest symbol rate is where the margin turns.
local rate, by = model:highest_symbol_rate(limits)
t.check(by == "loss" or by == "notch")
t.equal(model:margin({ symbol_rate = rate * (1 - 1e-6) }, limits).pass, true)
t.equal(model:margin({ symbol_rate = rate * (1 + 1e-6) }, limits).pass, false)

-- The longest stub: drilled to that length, with a bit 0.2 mm wider, it passes, and a little longer it does not.
local limit = ls.longest_stub(via, link, limits)
t.close(limit.stub_length, via:stubs()[1].length, 1e-14)
t.close(limit.margin, limit.length - limit.stub_length, 1e-12)
t.check(limit.length > 0 and limit.length < limit.stub_length and limit.limited_by ~= "none")
local options
local function left(length)
  local drilled = fixture.via(board, { backdrills = { { side = "bottom", depth = limit.stub_length - length, diameter = 0.45e-3 } } })
  t.close(drilled:stubs()[1].length, length, 1e-9)
  return drilled:model(options):margin(link, limits).pass
end
t.equal(left(limit.length - 2e-9), true)
t.equal(left(limit.length + 2e-7), false)
for _, fidelity in ipairs { "loaded", "ladder" } do
  options = { fidelity = fidelity }
  limit = ls.longest_stub(via, link, limits, options)
  t.equal(left(limit.length - 2e-9), true)
  t.equal(left(limit.length + (fidelity == "loaded" and 5e-9 or 2e-7)), false)
end
limit = ls.longest_stub(via, link, limits)
t.equal(ls.longest_stub(via, link, limits, { side = "bottom" }).length, limit.length)
t.check(ls.longest_stub(via, link, limits, { fidelity = "bulk" }).length > limit.length)
t.equal(ls.longest_stub(via, { symbol_rate = 1e9 }, limits).limited_by, "none")

local two = fixture.via(board, { connects = { "SIG1", "SIG2" } })
t.fails("side = 'top': the via has no stub there", ls.E_NONE, ls.longest_stub(via, link, limits, { side = "top" }))
t.fails("no stub", ls.E_NONE, ls.longest_stub(fixture.via(board, { connects = { "TOP", "BOTTOM" } }), link, limits))
t.raises("the via has two stubs", ls.longest_stub, two, link, limits)
t.check(ls.longest_stub(two, link, limits, { side = "top" }).length < two:stubs()[1].length + 1e-9)
t.raises("side: 'left' is not one of: top, bottom", ls.longest_stub, via, link, limits, { side = "left" })
t.raises("unknown key 'sides'; allowed: side, fidelity, z_ref, annuli", ls.longest_stub, via, link, limits, { sides = "top" })
t.raises("libstub.via expected, got libstub.model", ls.longest_stub, model, link, limits)

-- Batches: one for all or one each; a failed item does not stop the others.
local vias = { via, two, fixture.via(board, { antipad = ls.mm(1) }) }
local list = ls.longest_stub_batch(board, vias, "bottom", link, limits)
t.equal(#list, 3)
t.equal(list[1].length, limit.length)
t.check(list[1].status >= 0)
t.equal(list[3].length, ls.longest_stub(vias[3], link, limits).length)
local slow = { symbol_rate = 25.78125e9 }
local message, code
list, message, code = ls.longest_stub_batch(board, vias, { "bottom", "top", "top" }, { link, link, slow }, { limits, limits, limits })
t.equal(list[2].length, ls.longest_stub(two, link, limits, { side = "top" }).length)
t.equal(list[3].status, ls.E_NONE)
t.equal(list[3].length, nil)
t.equal(code, ls.E_NONE)
t.check(message:find("3", 1, true) and message:find("no stub there", 1, true), message)
local margins = ls.margin_batch(board, vias, { link, slow, link }, limits)
t.equal(#margins, 3)
for i, one in ipairs(vias) do
  local alone = one:model():margin(i == 2 and slow or link, limits)
  for key, value in pairs(alone) do t.equal(margins[i][key], value, key) end
end
margins, message, code = ls.margin_batch(board, vias, { link, { symbol_rate = 0 }, link }, { limits, limits, {} })
t.equal(margins[2].status, ls.E_ARGUMENT)
t.equal(margins[3].status, ls.E_ARGUMENT)
t.equal(code, ls.E_ARGUMENT)
t.check(message:find("symbol_rate", 1, true), message)
t.equal(#ls.margin_batch(board, {}, {}, {}), 0)
t.equal(#ls.margin_batch(board, {}, link, limits), 0)
t.raises("signals: 2 items for 3 vias", ls.margin_batch, board, vias, { link, link }, limits)
t.raises("signals[2].levels: integer expected", ls.margin_batch, board, vias, { link, { symbol_rate = 1e9, levels = "2" }, link }, limits)
t.raises("criteria[2]: table expected, got number", ls.margin_batch, board, vias, link, { limits, 2, limits })
t.raises("sides: 1 items for 3 vias", ls.longest_stub_batch, board, vias, { "top" }, link, limits)
t.raises("sides[3]: 'left' is not one of: top, bottom", ls.longest_stub_batch, board, vias, { "top", "top", "left" }, link, limits)

t.done()
