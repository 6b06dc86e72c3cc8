-- Models: questions over frequency, notches, what is refused.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local fixture = require "fixture"

local board = fixture.stackup()
local via = fixture.via(board)
local model = assert(via:model { fidelity = "loaded" })
t.equal(tostring(model), "libstub.model: 1 stub")
t.equal(model:stub_count(), 1)
t.equal(model:stub(1).length, via:stubs()[1].length)
t.equal(model:stub(1).exit_layer, "SIG1")

local line = model:line(1)
t.equal(line.fidelity, "loaded")
t.close(line.impedance, math.sqrt(line.inductance / line.capacitance), 1e-12)
t.close(line.dk_line, 299792458.0 ^ 2 * line.inductance * line.capacitance, 1e-9)
t.check(line.stated_error > 0 and line.end_capacitance > 0 and line.f_range > 1e9)
local bulk = assert(via:model { fidelity = "bulk" })
t.equal(bulk:line(1).fidelity, "bulk")
t.close(bulk:notches(ls.ghz(100))[1].f, ls.quarter_wave_frequency(via:stubs()[1].length, bulk:line(1).dk_effective, 1), 1e-3)

-- Below the stated range: one result. Arrays, tables and one frequency agree to the bit.
local top = line.f_range
local freq = ls.linspace(1e9, 0.9 * top, 50)
local z, s21, loss = model:zin(freq), model:s21(freq), model:added_loss(freq)
t.equal(#z, 50)
t.equal(select("#", model:zin(freq)), 1)
local z2 = model:zin(freq:totable(), { stub = 1 })
for i = 1, 50 do
  local re, im = z:get(i)
  t.check(re == z2:re(i) and im == z2:im(i))
  t.close(loss[i], -s21:db(i), 1e-9, 1e-12)
  local a, b = model:zin(freq[i])
  t.check(a == re and b == im)
  -- S21 = 2 Z/(2 Z + 50)
  local d = (2 * re + 50) ^ 2 + (2 * im) ^ 2
  t.close(s21:re(i), (2 * re * (2 * re + 50) + 4 * im * im) / d, 1e-9)
  t.close(s21:im(i), (2 * im * (2 * re + 50) - 4 * re * im) / d, 1e-9)
end
t.equal(select("#", model:added_loss(1e9)), 1)
t.equal(model:added_loss(freq[7]), loss[7])
t.equal(#model:zin {}, 0)
local heavy = assert(via:model { fidelity = "loaded", z_ref = 100 })
t.check(heavy:added_loss(1e9) > model:added_loss(1e9))

-- Above it: the result, a message, W_RANGE, and which frequencies.
local out, message, code, status = model:s21 { 0.5 * top, 2 * top }
t.equal(#out, 2)
t.check(message:find("beyond the stated range", 1, true), message)
t.equal(code, ls.W_RANGE)
t.equal(table.concat(status, " "), "0 1")
local re, im, message2, code2 = model:s21(2 * top)
t.check(re == out:re(2) and im == out:im(2) and message2 == message)
t.equal(code2, ls.W_RANGE)

-- Notches: rising, at the minimum of |S21|.
local notches = model:notches(ls.ghz(300))
t.check(#notches >= 3)
for i, notch in ipairs(notches) do
  t.equal(notch.stub, 1)
  t.check(i == 1 or notch.f > notches[i - 1].f)
  local _, _, here = model:s21(notch.f)
  local r, j = model:s21(notch.f)
  t.close(notch.depth_db, 10 * math.log(r * r + j * j, 10), 1e-6)
  t.equal(notch.error, line.stated_error)
  t.check(notch.q > 1 and notch.depth_db < -3 and math.abs(notch.f_series / notch.f - 1) < 0.05)
end
t.close((299792458.0 / (4 * via:stubs()[1].length * notches[1].f)) ^ 2, line.dk_effective, 1e-3)
t.equal(#model:notches(ls.ghz(1)), 0)
t.check(#model:notches(1e12) > 8)

-- The cavity model, the default: its line tells the first notch, every notch its error.
local cavity = assert(via:model())
local same = assert(via:model { fidelity = "cavity", annuli = 4 })
local ladder = assert(via:model { fidelity = "ladder" })
t.equal(ladder:line(1).fidelity, "ladder")
for _, m in ipairs { cavity, same } do
  local own = m:line(1)
  t.equal(own.fidelity, "cavity")
  t.equal(own.f_range, 110e9)
  t.equal(own.end_capacitance, 0.0)
  t.close(own.dk_line, own.dk_effective, 1e-12)
  local list = m:notches(ls.ghz(100))
  t.check(#list >= 1 and list[1].f == cavity:notches(ls.ghz(100))[1].f)
  t.equal(own.stated_error, list[1].error)
  t.close((299792458.0 / (4 * m:stub(1).length * list[1].f)) ^ 2, own.dk_effective, 1e-3)
  for _, notch in ipairs(list) do
    t.check(notch.error > 0 and notch.error < 0.02, notch.error)
    local r, j = m:s21(notch.f)
    t.close(notch.depth_db, 10 * math.log(r * r + j * j, 10), 1e-6)
  end
end
do -- more annuli move the first notch by no more than the error says
  local f4, f8 = cavity:notches(ls.ghz(50))[1], via:model { annuli = 8 }:notches(ls.ghz(50))[1]
  t.check(f4.f ~= f8.f)
  t.close(f4.f, f8.f, f4.error)
  -- the ladder is another model, and agrees within its stated error
  local quick = ladder:notches(ls.ghz(50))[1]
  t.check(quick.f ~= f4.f and quick.f ~= notches[1].f)
  t.close(quick.f, f4.f, quick.error)
end
t.fails("freq = 3e+11 Hz: must be >= 1e+06 and <= 2e+11", ls.E_ARGUMENT, cavity:zin(3e11))
t.equal(select(4, cavity:s21(1.5e11)), ls.W_RANGE)
t.fails("annuli = 1: must be >= 2 and <= 12", ls.E_ARGUMENT, via:model { annuli = 1 })
t.fails("annuli = 13", ls.E_ARGUMENT, via:model { annuli = 13 })
t.raises("annuli: integer expected, got 4.5", via.model, via, { annuli = 4.5 })

-- What stands around the barrel moves the notch: return vias in place, lids, fills; the closed forms do not see a lid.
local function first(change, fidelity)
  return assert(fixture.via(board, change):model { fidelity = fidelity }):notches(ls.ghz(100))[1].f
end
local mm = ls.mm(1)
local ring = { xy = { { mm, 0 }, { 0, mm }, { -mm, 0 }, { 0, -mm } } }
t.close(first { returns = ring }, first(), 1e-9)             -- the ring of four is the default of the fixture
t.check(math.abs(first { returns = { xy = { { 0.5 * mm, 0 }, { 0, 2 * mm } } } } / first() - 1) > 1e-4)
t.check(first { lid_distance = 0.1e-3 } < first())
t.check(first { outside_dk = 4 } < first())
t.equal(first({ lid_distance = 0.1e-3 }, "loaded"), first(nil, "loaded"))
local cut = { { side = "bottom", depth = 0.6e-3, diameter = 0.5e-3 } }
t.check(first { backdrills = cut, hole_dk = 4 } < first { backdrills = cut })

-- On a plane that connects, `antipads` is the opening that the signal comes through.
local function on_plane(opening)
  return first { connects = { "TOP", "GND2" }, antipads = opening and { GND2 = opening } }
end
t.check(on_plane(0.6e-3) ~= on_plane(1.0e-3))

-- Copper without thickness: a sheet.
do
  local layers = fixture.layers()
  for _, layer in ipairs(layers) do
    if layer.kind ~= "dielectric" then layer.thickness, layer.tol_plus, layer.tol_minus = 0, 0, 0 end
  end
  local sheets = assert(ls.stackup(layers))
  local thin = assert(fixture.via(sheets):model()):notches(ls.ghz(100))[1].f
  t.check(thin > first())                                    -- what is left of the stub is shorter
end

-- Two stubs, one of them asked for.
local two = assert(fixture.via(board, { connects = { "SIG1", "SIG2" } }):model())
t.equal(tostring(two), "libstub.model: 2 stubs")
t.equal(two:stub(1).side, "top")
t.equal(two:stub(2).side, "bottom")
local both, first, second = two:zin { 5e9 }, two:zin({ 5e9 }, { stub = 1 }), two:zin({ 5e9 }, { stub = 2 })
t.close(1 / both:im(1), 1 / first:im(1) + 1 / second:im(1), 1e-3, 0)
t.equal(two:zin({ 5e9 }, { stub = "all" }):im(1), both:im(1))
t.equal(two:notches(ls.ghz(200), { stub = 2 })[1].stub, 2)

-- No stub: compiles, loads nothing.
local none = assert(fixture.via(board, { connects = { "TOP", "BOTTOM" } }):model())
t.equal(none:stub_count(), 0)
t.equal(none:added_loss(1e9), 0.0)
t.equal(#none:notches(1e12), 0)
t.fails("no stub", ls.E_NONE, none:zin(1e9))
t.fails("stub 1: there is none", ls.E_NONE, none:line(1))

-- Refused, by name.
t.fails("stub 2: must be 1 to 1", ls.E_NONE, model:line(2))
t.fails("stub 0: must be 1 to 1", ls.E_NONE, model:stub(0))
t.raises("number expected, got string", model.stub, model, "1")
t.fails("stub 2: the model has 1", ls.E_NONE, model:zin(1e9, { stub = 2 }))
t.fails("item 2", ls.E_ARGUMENT, model:zin { 1e9, 0 })
t.fails("item 3", ls.E_ARGUMENT, model:s21 { 1e9, 1e9, 0 / 0 })
t.fails("freq", ls.E_ARGUMENT, model:added_loss(-1))
t.fails("f_max", ls.E_ARGUMENT, model:notches(-1))
t.fails("z_ref = -1 ohm", ls.E_ARGUMENT, via:model { z_ref = -1 })
t.raises("fidelity: 'fine' is not one of: default, bulk, loaded, ladder, cavity", via.model, via, { fidelity = "fine" })
t.raises("unknown key 'zref'; allowed: fidelity, z_ref, annuli", via.model, via, { zref = 50 })
t.raises("unknown key 'stubs'; allowed: stub", model.zin, model, 1e9, { stubs = 1 })
t.raises("stub: integer expected, got 1.5", model.zin, model, 1e9, { stub = 1.5 })
t.raises("stub: number of a stub or 'all' expected, got string", model.zin, model, 1e9, { stub = "top" })
t.raises("list of numbers or libstub.array expected, got no value", model.zin, model)
t.raises("list of numbers or libstub.array expected, got string", model.zin, model, "1e9")
t.raises("list of numbers or libstub.array expected, got libstub.complex", model.zin, model, z)
t.raises("unexpected argument", model.zin, model, 1e9, nil, 1)
t.raises("libstub.model expected, got libstub.via", model.zin, via, 1e9)

-- Batch: the same as one by one, whoever the neighbours are.
local vias, wanted = {}, {}
for i, antipad in ipairs { 0.6, 0.7, 0.8, 0.9, 1.0 } do
  vias[i] = fixture.via(board, { antipad = ls.mm(antipad) })
  wanted[i] = vias[i]:model { fidelity = "loaded" }
end
local batch = ls.first_notch_batch(board, vias, { fidelity = "loaded" })
for i, one in ipairs(wanted) do
  t.equal(batch.f1[i], one:notches(1e12)[1].f)
  t.close(batch.length[i], one:stub(1).length, 1e-14)
  t.close(batch.dk_effective[i], one:line(1).dk_effective, 1e-9)
  t.check(batch.status[i] >= 0)
end
local part = ls.first_notch_batch(board, { vias[3] }, { fidelity = "loaded" })
t.equal(part.f1[1], batch.f1[3])
local best = ls.first_notch_batch(board, vias)
for i, one in ipairs(vias) do
  local m = one:model()
  t.equal(best.f1[i], m:margin(fixture.signal, fixture.criteria).f1)
  t.close(best.f1[i], m:notches(ls.ghz(50))[1].f, 1e-8)       -- searched for from elsewhere
  t.check(best.f1[i] ~= batch.f1[i] and best.status[i] >= 0)
end
t.equal(#ls.first_notch_batch(board, {}).f1, 0)
local slower = ls.first_notch_batch(board, vias, { fidelity = "bulk" })
t.check(slower.f1[1] ~= batch.f1[1])
t.raises("vias[2]: libstub.via expected, got string", ls.first_notch_batch, board, { vias[1], "via" })
t.raises("vias[1]: made on another stackup", ls.first_notch_batch, fixture.stackup(), vias)
t.fails("z_ref", ls.E_ARGUMENT, ls.first_notch_batch(board, vias, { z_ref = -1 }))

t.done()
