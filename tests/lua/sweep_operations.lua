-- What memsweep does with failing memory: each operation once per allocation in it.
--     memsweep --sweep sweep_operations.lua FOLDER     writes a small board file into FOLDER
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local ls = require "libstub"
local fixture = require "fixture"

local function via() return fixture.via(fixture.stackup()) end
-- The cavity model allocates much in one piece of code: it has operations of its own, the others take the quick model.
local quick = { fidelity = "loaded" }
local function model() return via():model(quick) end
local freq_of, net = { 1e9, 2e9, 3e9, 4e9 }, nil
do
  local list = {}
  for k = 1, 4 do for i = 1, 32 do list[#list + 1] = 0.1 * math.sin(k * i) end end
  net = ls.complex(list, 4)
end
local channel_freq, channel = ls.linspace(1e9, 2e10, 200), nil
do
  local list = {}
  for k = 1, 200 do
    local f = channel_freq[k]
    local x = math.tan(math.pi / 2 * f / 1.0001e10)        -- an open stub across a line, with loss
    local re, im = 2 * (2 + 0.02) / ((2.02) ^ 2 + x * x), -2 * x / ((2.02) ^ 2 + x * x)
    list[#list + 1], list[#list + 2] = re, im
  end
  channel = ls.complex(list)
end
local rich = { pads = { SIG1 = 0.4e-3 }, antipads = { GND2 = 0.9e-3 }, clear = { SIG2 = 1e-3 }, edges = { left = 5e-3, right = 5e-3, front = 5e-3, back = 5e-3 },
  pair = { pitch = 1.5e-3, backdrills = { { side = "bottom", depth = 0.4e-3, diameter = 0.5e-3 } } },
  returns = { xy = { { 0, 1e-3 }, { 0, -1e-3 } }, drill = 0.3e-3, spans = { { "TOP", "GND2" }, { 1, 15 } } }, outside_dk = 3, lid_distance = 1e-3, hole_dk = 2,
  pin = { side = "top", length = 0.1e-3 }, backdrills = { { side = "bottom", depth = 0.5e-3, diameter = 0.5e-3 } } }
local freq = { 1e9, 2e9, 3e9 }

local folder = assert(arg[1], "the folder to write into is missing")
local touchstone_path = folder .. "/sweep.s2p"
local board_path, out_path = folder .. "/sweep_board.xml", folder .. "/sweep_out.csv"
do
  local file = io.open(board_path, "rb")
  local there = file and file:read("a")
  if file then file:close() end
  if there ~= fixture.board_xml() then
    file = assert(io.open(board_path, "wb"))
    file:write(fixture.board_xml())
    file:close()
  end
end
local function board()
  local rules = ls.rules_parse(fixture.rules)
  local loaded = assert(ls.board_load(board_path, { rules = rules }))
  return loaded, rules, loaded:plan(rules, nil, quick)
end

local operations = {
  { name = "load", setup = function() package.loaded.libstub = nil end, run = function() return require "libstub" end },
  { name = "array", run = function() return #ls.array { 1, 2, 3 } == 3 and #ls.linspace(1, 2, 10) == 10 end },
  { name = "formula", run = function()
    return ls.coax { inner_diameter = 1e-3, outer_diameter = 2e-3, dk = 4 } and not ls.coax(2e-3, 1e-3, 4)
  end },
  { name = "permittivity", run = function() return ls.dielectric_permittivity({ dk = 4, loss_tangent = 0.01 }, freq) end },
  { name = "stackup", setup = fixture.layers, run = function(layers)
    local s <close> = ls.stackup(layers)
    return #s == 15 and not ls.stackup { { name = "A", kind = "plane", thickness = -1 } }
  end },
  { name = "stackup:layers", setup = fixture.stackup, run = function(s) return #s:layers() == 15 and s:interval(0, 1e-3) end },
  { name = "via", setup = fixture.stackup, run = function(s)
    local o = ls.via(s, fixture.options(rich)):options()
    return o.pads.SIG1 and #o.returns.xy == 2 and #o.returns.spans == 2 and #o.pair.backdrills == 1 and not ls.via(s, fixture.options { drill = -1 })
  end },
  { name = "via:stubs", setup = via, run = function(v) return #v:stubs() == 1 and tostring(v) end },
  { name = "via:model", setup = via, run = function(v)
    local m <close> = v:model { fidelity = "loaded", z_ref = 50 }
    return m:stub_count() == 1
  end },
  { name = "cavity", setup = via, run = function(v)
    local m <close> = v:model { fidelity = "cavity", annuli = 2 }
    return #m:notches(3e10) == 1 and m:line(1)
  end },
  { name = "cavity batch", setup = via, run = function(v)
    return ls.first_notch_batch(v:stackup(), { v }, { fidelity = "cavity", annuli = 2 }).f1[1] > 1e10
  end },
  { name = "transition", setup = via, run = function(v)
    local made <close> = ls.transition(v, { ports = fixture.ports, annuli = 2 })
    return made and made:ports() == 2 and #made:remarks() >= 1 and ls.remark_text("outer")
      and not ls.transition(v, { ports = { { layer = "TOP" } } })
  end },
  { name = "transition:s", setup = function() return assert(ls.transition(via(), { ports = fixture.ports, annuli = 2 })) end,
    run = function(x) return #x:s(freq) == 3 and select(4, x:s { 1e9, -1 }) and #x:notches(3e10) >= 0 and x:reference(1) == 50 end },
  { name = "trace", run = function()
    local z, gamma = ls.trace_line(fixture.ports[2].trace, freq)
    return #z == 3 and #gamma == 3 and #ls.conductor_surface_impedance({}, freq) == 3
      and not ls.trace_line({ kind = "stripline", width = -1, height_below = 1e-4, dielectric_below = { dk = 4 } }, 1e9)
  end },
  { name = "networks", run = function()
    local mixed, z = ls.to_mixed(net, { { 1, 3 }, { 2, 4 } })
    return #ls.cascade(net, ls.deembed(net, net)) == 4 and #ls.to_single(mixed, { { 1, 3 }, { 2, 4 } }) == 4 and #z == 4
      and #ls.renormalise(net, 50, { 75, 50, 50, 50 }) == 4 and #ls.convert(net, "S", "Y") == 4
      and #ls.port_map(net, { 4, 1 }) == 4 and #ls.passivity(net) == 4 and #ls.reciprocity(net) == 4
      and #ls.shunt(net:element(1, 1)) == 4 and not ls.renormalise(net, -1, 50)
  end },
  { name = "responses", run = function()
    local early = ls.causality(freq_of, net)
    local fit, deviation = ls.insertion_loss_deviation(freq_of, { 1, 2, 2.5, 3 })
    return #early == 4 and fit.points == 4 and #deviation == 4 and #ls.tdr(freq_of, net, { 0, 1e-10 }, { rise_time = 1e-9 }) == 2
      and #ls.step_response(freq_of, net, { 0, 1e-10 }, { rise_time = 1e-9 }) == 2
  end },
  { name = "touchstone", run = function()
    local file <close> = ls.touchstone_parse(fixture.touchstone)
    local data, parts, text = file:get(), {}, fixture.touchstone
    data.comments = { "one", "two" }
    local again <close> = assert(ls.touchstone_read(function(bytes)
      local piece = text:sub(1, 20)
      text = text:sub(21)
      return piece ~= "" and piece or nil
    end))
    return ls.touchstone_write(data, function(part) parts[#parts + 1] = part end) and #again:get().data == 3
      and #table.concat(parts) > 100 and not ls.touchstone_parse("nonsense\n")
  end },
  { name = "touchstone files", run = function()
    local data = ls.touchstone_parse(fixture.touchstone):get()
    return ls.touchstone_save(data, touchstone_path) and #ls.touchstone_load(touchstone_path):get().freq == 3
  end },
  { name = "find_notches", run = function()
    local notches, averaged, trend = ls.find_notches(channel_freq, channel)
    return #notches == 1 and #averaged == 200 and #trend == 200
  end },
  { name = "fits", setup = via, run = function(v)
    local fit, residuals = ls.fit_in_plane_dk(function(ratio) return 1e10 / math.sqrt(ratio) end, { 0.98e10, 0.97e10 }, { 1e7, 1e7 })
    local coupons, rest, fitted = ls.fit_coupons(v:stackup(), { v }, { v:model { fidelity = "ladder" }:notches(1e11)[1].f }, { 1e7 },
      { fidelity = "ladder" })
    return fit.dof == 1 and #residuals == 2 and coupons.dof == 0 and #rest == 1 and fitted:with_in_plane_ratio(1.2)
  end },
  { name = "model:zin", setup = model, run = function(m)
    return #m:zin(freq) == 3 and m:s21(1e9) and #m:added_loss({ 1e9, 1e11 }, { stub = 1 }) == 2
  end },
  { name = "model:notches", setup = model, run = function(m) return #m:notches(1e12) > 3 and m:line(1) and m:stub(1) end },
  { name = "margin", setup = model, run = function(m)
    return m:margin(fixture.signal, fixture.criteria).f1 and m:highest_symbol_rate(fixture.criteria)
  end },
  { name = "longest_stub", setup = via, run = function(v)
    local list = ls.longest_stub_batch(v:stackup(), { v, v }, "bottom", fixture.signal, fixture.criteria, quick)
    return ls.longest_stub(v, fixture.signal, fixture.criteria, quick).length == list[2].length
  end },
  { name = "margin_batch", setup = via, run = function(v)
    return ls.margin_batch(v:stackup(), { v, v }, { fixture.signal, fixture.signal }, fixture.criteria, quick)[2].f1
      and ls.first_notch_batch(v:stackup(), { v }, quick).f1[1]
  end },
  { name = "plan", setup = via, run = function(v)
    local plan <close> = ls.plan(v:stackup(), {
      { via = v, signal = { symbol_rate = 25e9 }, criteria = fixture.criteria }, { via = v },
      { via = v, signal = { symbol_rate = 0 }, criteria = fixture.criteria } }, fixture.capability, quick)
    return plan:decision(1).action == "drill_bottom" and #plan:groups() == 1 and plan:totals() and plan:reason(3)
  end },
  { name = "rules", run = function()
    local rules <close> = ls.rules_parse("signal A symbol_rate 10 GBd notch_over_nyquist 2\nnet X* A\nfab depths 1 mm 2 mm\n")
    return rules:signal(1) == "A" and rules:match("X1") == 1 and rules:capability() and not ls.rules_parse("nonsense\n")
  end },
  { name = "board_load", setup = function() return ls.rules_parse(fixture.rules) end, run = function(rules)
    local loaded <close> = ls.board_load(board_path, { rules = rules, progress = function() end })
    return loaded:hole_count() == 6 and #loaded:stackup() == 7
  end },
  { name = "board:holes", setup = board, run = function(b)
    return #b:holes() == 6 and #b:notices() > 0 and b:via(1):options().connects[2] == "IN1"
  end },
  { name = "board:plan", setup = board, run = function(b, rules, plan)
    local made <close> = b:plan(rules, nil, quick)
    return made:decision(1).action == "drill_bottom" and b:summary(plan)
  end },
  { name = "board:write", setup = board, run = function(b, _, plan)
    return b:write_plan_csv(plan, out_path) and b:write_drill_csv(plan, out_path) and b:write(plan, out_path)
  end },
}

return operations
