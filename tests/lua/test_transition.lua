-- Transitions: S-parameters of whole vias, against a three-dimensional run and identities, and what is refused.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local fixture = require "fixture"

-- ---- tests/data/fdtd3d, case s_k4: ten planes without thickness 0.2 mm apart, a stub of 1.2 mm ----

local loss = 0.019471375970337733 / (2 * math.pi * 20e9 * 8.8541878128e-12 * 3.5)
local case = {}
do
  local layers, last = {}, nil
  for _, z in ipairs { 0, 0.2, 0.4, 0.6, 0.7, 0.8, 1.0, 1.2, 1.4, 1.6, 1.8, 1.9 } do
    if last then
      layers[#layers + 1] = { name = "D" .. z, kind = "dielectric", thickness = (z - last) * 1e-3, dk = 3.5, loss_tangent = loss, f_ref = 20e9 }
    end
    layers[#layers + 1] = { name = "Z" .. z, kind = (z == 0.7 or z == 1.9) and "signal" or "plane", thickness = 0 }
    last = z
  end
  case.stackup = assert(ls.stackup(layers))
  local xy, spans = {}, {}
  for _, x in ipairs { 0.65e-3, -0.65e-3 } do
    for _, y in ipairs { 0.65e-3, -0.65e-3 } do
      xy[#xy + 1] = { x, y }
      spans[#spans + 1] = { "Z0", "Z1.8" }
    end
  end
  case.via = assert(ls.via(case.stackup, { drill = 0.25e-3, antipad = 0.7e-3, antipads = { Z0 = 0.7e-3 },
    pads = { ["Z0.7"] = 0.45e-3, ["Z1.9"] = 0.45e-3 }, connects = { "Z0", "Z0.7" },
    returns = { xy = xy, spans = spans, drill = 0.25e-3 } }))
end
local function ports(change)
  local trace = { layer = "Z0.7", impedance = 48.792, dk = 3.5, loss_tangent = loss, width = 0.113e-3, distance = 2e-3, z_ref = 48.792 }
  for key, value in pairs(change or {}) do trace[key] = value end
  return { { kind = "coax", layer = "Z0", dk = 1.524456 }, trace }
end
local whole = assert(ls.transition(case.via, { ports = ports(), metal = "perfect" }))
t.equal(select("#", ls.transition(case.via, { ports = ports() })), 1)
t.equal(tostring(whole), "libstub.transition: 2 ports")
t.equal(whole:ports(), 2)
t.equal(whole:reference(1), 50.0)
t.equal(whole:reference(2), 48.792)
t.equal(#whole:remarks(), 0)
local notches = whole:notches(40e9)
t.equal(#notches, 1)
t.close(notches[1].f, 22.023516822e9, 0.005 + 0.001, 0, "first notch of tests/data/fdtd3d/results.json and its uncertainty")
t.close(notches[1].depth_db, -30.134, 0, 2, "its depth")
t.check(notches[1].stub == nil and notches[1].error == nil and notches[1].q > 10)
do
  local s = whole:s(notches[1].f)
  t.close(s:db(1, 2, 1), notches[1].depth_db, 1e-9)
  t.equal(select("#", whole:s(notches[1].f)), 1)
end

-- Passive, reciprocal, the same one by one; copper with loss takes something away.
local freq = ls.linspace(1e9, 67e9, 34)
local s = assert(whole:s(freq))
t.equal(#s, 34)
t.equal(s:ports(), 2)
local sigma, difference = ls.passivity(s), ls.reciprocity(s)
for k = 1, #s do t.check(sigma[k] <= 1 + 1e-9 and difference[k] < 1e-9) end
t.equal(whole:s(freq[20]):re(1, 2, 1), s:re(20, 2, 1))
t.equal(whole:s(freq:totable()):im(9, 1, 1), s:im(9, 1, 1))
t.equal(#whole:s {}, 0)
local lossy = assert(ls.transition(case.via, { ports = ports() }))
t.check(lossy:s(5e9):db(1, 2, 1) < whole:s(5e9):db(1, 2, 1))
local fine = assert(ls.transition(case.via, { ports = ports(), metal = "perfect", annuli = 6 })):notches(40e9)[1]
t.check(fine.f ~= notches[1].f)
t.close(fine.f, notches[1].f, 0.005)

-- What the stub does is the difference from the transition without it.
local without = assert(ls.transition(case.via, { ports = ports(), metal = "perfect", stubs = "removed" }))
t.equal(#without:notches(40e9), 0)
t.check(without:s(notches[1].f):db(1, 2, 1) > notches[1].depth_db + 20)
-- Other references are a renormalisation.
do
  local other = assert(ls.transition(case.via, { ports = ports { z_ref = 75 }, metal = "perfect" })):s(freq)
  local same = ls.renormalise(s, { 50, 48.792 }, { 50, 75 })
  for k = 1, #s do
    t.close(other:re(k, 2, 1), same:re(k, 2, 1), 0, 1e-9)
    t.close(other:im(k, 2, 2), same:im(k, 2, 2), 0, 1e-9)
  end
end
-- A cross-section says the same as its own impedance and Dk would, near one frequency.
do
  local trace = { kind = "stripline", width = 0.113e-3, height_below = 0.1e-3, height_above = 0.1e-3,
    dielectric_below = { dk = 3.5, loss_tangent = loss, f_ref = 20e9 } }
  local z, _, _, beta = ls.trace_line(trace, 20e9)
  local from_trace = assert(ls.transition(case.via, { metal = "perfect",
    ports = { ports()[1], { layer = "Z0.7", trace = trace, distance = 2e-3 } } })):s(20e9)
  local from_line = assert(ls.transition(case.via, { metal = "perfect", ports = ports { impedance = z,
    dk = (beta * 299792458.0 / (2 * math.pi * 20e9)) ^ 2, z_ref = 50 } })):s(20e9)
  t.close(from_trace:re(1, 2, 1), from_line:re(1, 2, 1), 0, 1e-3)
  t.close(from_trace:im(1, 2, 1), from_line:im(1, 2, 1), 0, 1e-3)
end

-- ---- a pair with boards of our own: modes, unequal barrels, edges ----

local board = fixture.stackup()
local function pair(change)
  local o = { antipads = { TOP = 0.8e-3 }, pair = { pitch = 1.2e-3 }, returns = { xy = { { -0.9e-3, 0 }, { 2.1e-3, 0 } } } }
  for key, value in pairs(change or {}) do o[key] = value end
  return fixture.via(board, o)
end
local line = { layer = "SIG1", impedance = 50, dk = 3.6, distance = 2e-3 }
local sides = { { layer = "TOP", impedance = 50, dk = 3 }, line }
local function of_pair(change)
  local made, message, code = ls.transition(pair(change), { ports = sides })
  return made, message, code
end
local two, message, code = of_pair { antipads = {} }
t.equal(code, ls.W_RANGE)
t.equal(message, ls.remark_text "outer")
t.equal(table.concat(two:remarks(), " "), "outer")
t.equal(two:ports(), 4)
t.equal(two:reference(4), 50.0)
local at = { 5e9, 10e9, 20e9 }
local mixed = ls.to_mixed(two:s(at), { { 1, 3 }, { 2, 4 } })
local odd, even = two:notches(60e9, { mode = "odd" })[1], two:notches(60e9, { mode = "even", to = 2, from = 1 })[1]
t.check(odd and even and odd.f ~= even.f)
t.close(ls.to_mixed(two:s(odd.f), { { 1, 3 }, { 2, 4 } }):db(1, 2, 1), odd.depth_db, 1e-6)
t.close(ls.to_mixed(two:s(even.f), { { 1, 3 }, { 2, 4 } }):db(1, 4, 3), even.depth_db, 1e-6)
for k = 1, 3 do t.check(mixed:abs(k, 4, 1) < 1e-9, "no conversion between equal barrels") end
local unequal, why = of_pair { antipads = {}, pair = { pitch = 1.2e-3, backdrills = { { side = "bottom", depth = 0.9e-3, diameter = 0.45e-3 } } } }
t.check(unequal and type(why) == "string")
t.equal(table.concat(unequal:remarks(), " "), "outer unequal")
local converted = ls.to_mixed(unequal:s(at), { { 1, 3 }, { 2, 4 } })
for k = 1, 3 do t.check(converted:abs(k, 4, 1) > 1e-3, "conversion between unequal barrels") end
-- an own drill that is the barrel's makes the same pair
local drilled = { { side = "bottom", depth = 0.9e-3, diameter = 0.45e-3 } }
t.equal(of_pair({ antipads = {}, backdrills = drilled, pair = { pitch = 1.2e-3, backdrills = drilled } }):s(10e9):re(1, 4, 1),
  of_pair({ antipads = {}, backdrills = drilled }):s(10e9):re(1, 4, 1))
do -- no return via near, and edges that are near
  local function alone(change)
    local via = assert(ls.via(case.stackup, { drill = 0.25e-3, antipad = 0.7e-3, antipads = { Z0 = 0.7e-3 }, edges = change,
      pads = { ["Z0.7"] = 0.45e-3 }, connects = { "Z0", "Z0.7" } }))
    return assert(ls.transition(via, { ports = ports() }))
  end
  local open = alone()
  t.equal(table.concat(open:remarks(), " "), "radiates")
  t.check(ls.remark_text("radiates"):find("no return via", 1, true))
  local bounded = alone { left = 5e-3, right = 5e-3, front = 5e-3, back = 5e-3, shorted = true }
  t.equal(#bounded:remarks(), 0)
  t.check(bounded:s(10e9):db(1, 2, 1) ~= open:s(10e9):db(1, 2, 1))
end

-- A tap: three layers that connect, three ports.
do
  local tap = assert(ls.via(board, fixture.options { connects = { "TOP", "SIG1", "SIG2" } }))
  local three = assert(ls.transition(tap, { ports = { { layer = "TOP", impedance = 50 }, line, { layer = "SIG2", impedance = 50, dk = 3.6 } } }))
  t.equal(three:ports(), 3)
  local s3 = three:s(1e8)
  for i = 1, 3 do t.close(s3:abs(1, i, i), 1 / 3, 0.05) end           -- three equal lines on one node
  local one = assert(ls.transition(fixture.via(board), { ports = { line } }))
  t.equal(one:ports(), 1)
  t.equal(one:s(1e9):ports(), 1)
  t.check(#one:notches(40e9) >= 0)
end

-- Frequencies beyond the range, one by one.
do
  local out, text, status_code, status = whole:s { 1e9, 1.5e11, 3e11 }
  t.equal(#out, 3)
  t.equal(status_code, ls.E_ARGUMENT)
  t.check(text:find("item 3: freq = 3e+11 Hz", 1, true), text)
  t.equal(table.concat(status, " "), "0 1 -1")
  t.check(out:re(3, 1, 1) ~= out:re(3, 1, 1) and out:re(2, 1, 1) == out:re(2, 1, 1))
  t.equal(select(3, whole:s(1.5e11)), ls.W_RANGE)
  t.fails("freq = -1 Hz", ls.E_ARGUMENT, whole:s(-1))
  t.fails("nan Hz", ls.E_ARGUMENT, whole:s { 0 / 0 })
end

-- Refused, with Lua's numbers and names.
local function make(list, change)
  local o = { ports = list }
  for key, value in pairs(change or {}) do o[key] = value end
  return ls.transition(case.via, o)
end
t.fails("port 3: must be 1 to 2", ls.E_ARGUMENT, whole:reference(3))
t.fails("port 0: must be 1 to 2", ls.E_ARGUMENT, whole:reference(0))
t.fails("to = 3: must be 1 to 2", ls.E_ARGUMENT, whole:notches(1e10, { to = 3 }))
t.fails("from = 0: must be 1 to 2", ls.E_ARGUMENT, whole:notches(1e10, { from = 0 }))
t.fails("mode = 'odd': a single barrel has no modes", ls.E_NONE, whole:notches(1e10, { mode = "odd" }))
t.fails("to = 3: must be 1 to 2, a port of the first barrel", ls.E_ARGUMENT, two:notches(1e10, { mode = "even", to = 3 }))
t.fails("f_max = -1 Hz", ls.E_ARGUMENT, whole:notches(-1))
t.fails("count = 0", ls.E_ARGUMENT, make {})
t.fails("ports[1]: there is no layer 'Z9'", ls.E_NONE, make { { layer = "Z9" } })
t.fails("ports[2]: layer = 11 'Z0.8': is not one that the via connects", ls.E_GEOMETRY, make { ports()[1], { layer = 11, impedance = 50 } })
t.fails("ports[2]: layer = 1 'Z0': has port 1 already", ls.E_GEOMETRY, make { ports()[1], ports()[1] })
t.fails("ports[1]: impedance = 0 ohm", ls.E_ARGUMENT, make { { layer = "Z0.7" } })
t.fails("ports[2]: distance = 0.0001 m", ls.E_ARGUMENT, make(ports { distance = 1e-4 }))
t.fails("ports[2]: z_ref = 0.5 ohm", ls.E_ARGUMENT, make(ports { z_ref = 0.5 }))
t.fails("ports[1]: kind = 'coax': ", ls.E_GEOMETRY, make { { kind = "coax", layer = "Z0", impedance = 50 } })
t.fails("layer = 5 'SIG1': a coaxial port is computed on the layer the barrel begins on, 1 'TOP'", ls.E_UNSUPPORTED,
  ls.transition(fixture.via(board), { ports = { { kind = "coax", layer = "SIG1" } } }))
t.fails("a trace that leaves within a plane is not computed", ls.E_UNSUPPORTED, ls.transition(
  fixture.via(board, { connects = { "TOP", "GND2" }, antipads = { GND2 = 0.8e-3 } }), { ports = { { layer = "GND2", impedance = 50 } } }))
do -- the stub models leave unequal barrels to the transition
  local via = pair { pair = { pitch = 1.2e-3, backdrills = { { side = "bottom", depth = 0.9e-3, diameter = 0.45e-3 } } } }
  t.fails("pair.backdrills: a pair whose barrels end at different depths", ls.E_UNSUPPORTED, via:model())
end
t.fails("annuli = 1", ls.E_ARGUMENT, make(ports(), { annuli = 1 }))
t.fails("ports[2]: trace: impedance, dk, loss_tangent and width must be 0 beside it", ls.E_GEOMETRY, make(ports { trace = {
  kind = "stripline", width = 1e-4, height_below = 1e-4, height_above = 1e-4, dielectric_below = { dk = 4 } } }))
t.fails("ports[1]: trace: dielectric_below: dk = 0.5", ls.E_ARGUMENT, make { { layer = "Z0.7", trace = {
  kind = "stripline", width = 1e-4, height_below = 1e-4, height_above = 1e-4, dielectric_below = { dk = 0.5 } } } })

-- Wrong calls.
t.raises("missing key 'ports'", ls.transition, case.via, {})
t.raises("ports: table expected, got string", make, "Z0")
t.raises("ports[2]: table expected, got string", make, { ports()[1], "Z0.7" })
t.raises("ports[1]: missing key 'layer'", make, { {} })
t.raises("ports[1]: unknown key 'z0'; allowed: layer, kind, trace", make, { { z0 = 50 } })
t.raises("ports[1].kind: 'wire' is not one of: trace, coax", make, { { kind = "wire" } })
t.raises("ports[1].trace.dielectric_below.dk: number expected, got string", make, { { layer = "Z0.7", trace = {
  kind = "stripline", width = 1, height_below = 1, dielectric_below = { dk = "4" } } } })
t.raises("ports[1].trace: missing key 'kind'", make, { { layer = "Z0.7", trace = {} } })
t.raises("stubs: 'cut' is not one of: kept, removed", make, ports(), { stubs = "cut" })
t.raises("metal: 'gold' is not one of: lossy, perfect", make, ports(), { metal = "gold" })
t.raises("unknown key 'mode'; allowed: ports, stubs, annuli, metal", make, ports(), { mode = "odd" })
t.raises("libstub.via expected, got table", ls.transition, {}, {})
t.raises("table expected, got no value", ls.transition, case.via)
t.raises("unexpected argument", ls.transition, case.via, { ports = {} }, 1)
t.raises("mode: 'both' is not one of: single, odd, even", whole.notches, whole, 1e10, { mode = "both" })
t.raises("unknown key 'stub'; allowed: to, from, mode", whole.notches, whole, 1e10, { stub = 1 })
t.raises("number expected, got table", whole.notches, whole, {})
t.raises("number expected, got string", whole.reference, whole, "1")
t.raises("list of numbers or libstub.array expected, got no value", whole.s, whole)
t.raises("'loud' is not one of: radiates, launch, outer, slot, unequal", ls.remark_text, "loud")
t.raises("unexpected argument", whole.remarks, whole, 1)

t.done()
