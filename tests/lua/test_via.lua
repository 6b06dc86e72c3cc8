-- Vias: the option table, stub pieces, what is refused and how it is named.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local fixture = require "fixture"

local board = fixture.stackup()
local function via(change) return ls.via(board, fixture.options(change)) end

local v = assert(via())
t.equal(tostring(v), "libstub.via: drill 0.25 mm, connects TOP, SIG1")
t.check(v:stackup() == board)
t.equal(v:check(), true)

local stubs = v:stubs()
t.equal(#stubs, 1)
t.equal(stubs[1].side, "bottom")
t.equal(stubs[1].exit_layer, "SIG1")
t.equal(stubs[1].end_layer, "BOTTOM")
t.close(stubs[1].top, 340e-6, 1e-12)
t.close(stubs[1].bottom, 1.6e-3, 1e-12)
t.close(stubs[1].length, 1.26e-3, 1e-12)
t.close(stubs[1].length_max - stubs[1].length, 111e-6, 1e-9)
t.check(stubs[1].length_rss_max < stubs[1].length_max and stubs[1].length_rss_min > stubs[1].length_min)

-- Two stubs, top one first; none; a drilled one.
stubs = assert(via { connects = { "SIG2", "SIG1" } }):stubs()
t.equal(#stubs, 2)
t.equal(stubs[1].side, "top")
t.equal(stubs[1].end_layer, "TOP")
t.equal(stubs[2].exit_layer, "SIG2")
t.equal(#assert(via { connects = { "TOP", "BOTTOM" } }):stubs(), 0)
local drilled = assert(via { backdrills = { { side = "bottom", depth = 0.9e-3, diameter = 0.45e-3 } } })
t.close(drilled:stubs()[1].length, 0.36e-3, 1e-12)
t.equal(drilled:stubs()[1].end_layer, nil)

-- Layers by number, and ends of the span one at a time.
t.equal(assert(via { connects = { 1, 5 } }):stubs()[1].exit_layer, "SIG1")
local blind = assert(via { end_layer = "GND2" })
t.equal(blind:options().start_layer, "TOP")
t.equal(blind:stubs()[1].end_layer, "GND2")
t.equal(assert(via { start_layer = "GND1", connects = { "SIG2" } }):options().end_layer, "BOTTOM")

-- options() makes the same via again.
local rich = assert(via { pads = { SIG1 = 0.4e-3, [3] = 0.3e-3 }, antipads = { GND2 = 0.9e-3 }, clear = { SIG2 = 1e-3 },
  nonfunctional_pads = "kept", pad_end = 0.6e-3, returns = { wall = 2e-3 }, pair = { pitch = 1.1e-3, shared = true },
  pin = { side = "top", length = 0.5e-3 }, start_layer = 1, end_layer = 15,
  backdrills = { { side = "bottom", depth = 0.5e-3, diameter = 0.5e-3 } } })
local function same(a, b, path)
  for key, value in pairs(a) do
    if type(value) == "table" then
      t.check(type(b[key]) == "table", path .. key)
      same(value, b[key] or {}, path .. key .. ".")
    else
      t.equal(b[key], value, path .. tostring(key))
    end
  end
end
local o = rich:options()
same(o, assert(ls.via(board, o)):options(), "")
t.equal(o.pads.GND1, 0.3e-3)
t.equal(o.pads.SIG1, 0.4e-3)
t.equal(o.pad_start, 0.5e-3)
t.equal(o.pad_end, 0.6e-3)
t.equal(o.returns.wall, 2e-3)
t.equal(o.pair.shared, true)
t.equal(o.pin.side, "top")
t.equal(o.backdrills[1].depth, 0.5e-3)
t.equal(o.connects[2], "SIG1")
t.equal(o.outside_dk, nil)
o = assert(via { returns = { xy = { { 1e-3, 0 }, { -0.5e-3, 2e-3 } }, drill = 0.3e-3 }, outside_dk = 3, lid_distance = 2e-3,
  hole_dk = 2.5, antipads = { GND2 = 0.9e-3 }, connects = { "TOP", "GND2" } }):options()
same(o, assert(ls.via(board, o)):options(), "")
t.equal(#o.returns.xy, 2)
t.equal(o.returns.xy[2][1], -0.5e-3)
t.equal(o.returns.xy[2][2], 2e-3)
t.equal(o.returns.drill, 0.3e-3)
t.equal(o.returns.count, nil)
t.equal(o.returns.distance, nil)
t.equal(o.outside_dk, 3.0)
t.equal(o.lid_distance, 2e-3)
t.equal(o.hole_dk, 2.5)
t.equal(o.antipads.GND2, 0.9e-3)

o = assert(via { returns = { xy = { { 0, 1e-3 }, { 0, -1e-3 } }, spans = { { "GND1", 13 }, { 1, "BOTTOM" } } },
  pair = { pitch = 1.1e-3, backdrills = {} }, edges = { left = 4e-3, right = 6e-3, front = 5e-3, back = 5e-3, shorted = true } }):options()
same(o, assert(ls.via(board, o)):options(), "")
t.equal(table.concat(o.returns.spans[1], " "), "GND1 PWR")
t.equal(table.concat(o.returns.spans[2], " "), "TOP BOTTOM")
t.equal(#o.pair.backdrills, 0)
t.equal(o.edges.right, 6e-3)
t.equal(o.edges.shorted, true)
o = assert(via { edges = { left = 4e-3, right = 6e-3, front = 5e-3, back = 5e-3 },
  pair = { pitch = 1.1e-3, backdrills = { { side = "bottom", depth = 0.5e-3, diameter = 0.5e-3 } } } }):options()
same(o, assert(ls.via(board, o)):options(), "")
t.equal(o.edges.shorted, false)
t.equal(o.pair.backdrills[1].depth, 0.5e-3)
t.equal(o.backdrills, nil)
t.equal(assert(via { pair = { pitch = 1.1e-3 } }):options().pair.backdrills, nil)

-- Contradictions and missing things of the geometry: nil, message, code, with Lua's numbers.
t.fails("drill = 0 m: must be > 0", ls.E_ARGUMENT, via { drill = 0 })
t.fails("drill = -0.00025 m", ls.E_ARGUMENT, via { drill = -0.25e-3 })
t.fails("nan m: must be > 0", ls.E_ARGUMENT, via { drill = 0 / 0 })
t.fails("layer 3 'GND1': antipad = 0.0002 m: must be > drill", ls.E_GEOMETRY, via { antipad = 0.2e-3 })
t.fails("layer 3 'GND1': antipad = 0.0004 m: must be > pad", ls.E_GEOMETRY, via { antipad = 0.4e-3, nonfunctional_pads = "kept" })
t.fails("layer 3 'GND1': antipad = 0 m: a plane", ls.E_GEOMETRY, via { antipad = 0 })
t.fails("pad_inner = 0.0001 m: must be 0 or >= drill", ls.E_GEOMETRY, via { pad_inner = 0.1e-3 })
t.fails("connects[2]: there is no layer 'SIG9'", ls.E_NONE, via { connects = { "TOP", "SIG9" } })
t.fails("connects[2]: layer 16: must be 1 to 15", ls.E_NONE, via { connects = { "TOP", 16 } })
t.fails("pads: there is no layer 'SIG9'", ls.E_NONE, via { pads = { SIG9 = 0.4e-3 } })
t.fails("end_layer: there is no layer 'SIG9'", ls.E_NONE, via { end_layer = "SIG9" })
t.fails("connects", ls.E_ARGUMENT, via { connects = {} })
t.fails("connects[1]: connects = 2 'R1': must be a copper layer", ls.E_ARGUMENT, via { connects = { "R1" } })
t.fails("start_layer = 2 'R1': must be a copper layer", ls.E_ARGUMENT, via { start_layer = "R1" })
t.fails("connects[2]: layer 1 'TOP': listed twice", ls.E_ARGUMENT, via { connects = { "TOP", "TOP" } })
t.fails("returns.xy[2] = 0.0001, 0 m: touches the barrel", ls.E_GEOMETRY, via { returns = { xy = { { 1e-3, 0 }, { 1e-4, 0 } } } })
t.fails("returns.xy[2] = 0.001, 1e-05 m: touches return via 1", ls.E_GEOMETRY,
  via { returns = { xy = { { 1e-3, 0 }, { 1e-3, 1e-5 } } } })
t.fails("returns.xy[1] = 2, 0 m: must be >= -1 and <= 1 m", ls.E_ARGUMENT, via { returns = { xy = { { 2, 0 } } } })
t.fails("nan, 0 m: must be >= -1", ls.E_ARGUMENT, via { returns = { xy = { { 0 / 0, 0 } } } })
t.fails("return_count = 0", ls.E_ARGUMENT, via { returns = { xy = {} } })
do
  local function spans(list) return via { returns = { xy = { { 1e-3, 0 }, { 0, 1e-3 } }, spans = list } } end
  t.fails("returns.spans[2]: there is no layer 'SIG9'", ls.E_NONE, spans { { "TOP", "BOTTOM" }, { "TOP", "SIG9" } })
  t.fails("returns.spans[2]: layer 2 'R1': must be a copper layer", ls.E_ARGUMENT, spans { { "TOP", "BOTTOM" }, { "R1", "BOTTOM" } })
  t.fails("returns.spans[1]: layer 3: must be below layer 7", ls.E_GEOMETRY, spans { { "GND2", "GND1" }, { "TOP", "BOTTOM" } })
  t.raises("returns.spans: 1 items for 2 return vias", spans, { { "TOP", "BOTTOM" } })
  t.raises("returns.spans[1]: { first, last } expected, got 1 items", spans, { { "TOP" }, { "TOP", "BOTTOM" } })
  t.raises("returns.spans[2]: table expected, got string", spans, { { "TOP", "BOTTOM" }, "TOP" })
  t.raises("returns.spans[1]: name or number of a layer expected, got boolean", spans, { { true, 3 }, { 1, 3 } })
  t.raises("returns.spans: only together with xy", via, { returns = { count = 4, distance = 1e-3, spans = {} } })
  local function edges(change)
    local e = { left = 4e-3, right = 4e-3, front = 4e-3, back = 4e-3 }
    for key, value in pairs(change) do e[key] = value end
    return via { edges = e, returns = { xy = { { 1e-3, 0 } } }, pair = { pitch = 1.5e-3 } }
  end
  t.fails("edges.front", ls.E_ARGUMENT, edges { front = -1e-3 })
  t.fails("edges.left", ls.E_ARGUMENT, edges { left = 0 })
  t.fails("edges.back", ls.E_ARGUMENT, edges { back = 0 / 0 })
  t.fails("returns.xy[1] = 0.001, 0 m: beyond the edges", ls.E_GEOMETRY, edges { right = 0.5e-3 })
  t.fails("edges.right = 0.0013 m", ls.E_GEOMETRY, edges { right = 1.3e-3 })
  t.raises("edges.back: number expected, got string", edges, { back = "1" })
  t.raises("edges.shorted: boolean expected, got number", edges, { shorted = 1 })
  t.raises("edges: missing key 'left'", via, { edges = {} })
  t.raises("edges: unknown key 'top'; allowed: left, right, front, back, shorted", via, { edges = { top = 1 } })
end
t.fails("pair.backdrills[2]: side = 'bottom'", ls.E_ARGUMENT, via { pair = { pitch = 1.2e-3, backdrills = {
  { side = "bottom", depth = 0.1e-3, diameter = 0.5e-3 }, { side = "bottom", depth = 0.1e-3, diameter = 0.5e-3 } } } })
t.fails("pair.backdrills[1]: depth = 0.0001 m: cuts layer 1 'TOP'", ls.E_GEOMETRY, via { pair = { pitch = 1.2e-3, backdrills = {
  { side = "top", depth = 0.1e-3, diameter = 0.5e-3 } } } })
t.raises("pair.backdrills[1]: missing key 'side'", via, { pair = { pitch = 1.2e-3, backdrills = { {} } } })
t.fails("outside_dk = 0.5: must be >= 1 and <= 1000", ls.E_ARGUMENT, via { outside_dk = 0.5 })
t.fails("hole_dk = -1", ls.E_ARGUMENT, via { hole_dk = -1 })
t.fails("lid_distance = -0.001 m: must be >= 0", ls.E_ARGUMENT, via { lid_distance = -1e-3 })
t.fails("pads[2]", ls.E_ARGUMENT, via { pads = { SIG1 = 0.4e-3, [5] = 0.4e-3 } })
t.fails("backdrills[2]: side = 'bottom'", ls.E_ARGUMENT, via { backdrills = {
  { side = "bottom", depth = 0.5e-3, diameter = 0.5e-3 }, { side = "bottom", depth = 0.5e-3, diameter = 0.5e-3 } } })
t.fails("cuts layer 5 'SIG1'", ls.E_GEOMETRY, via { backdrills = { { side = "bottom", depth = 1.3e-3, diameter = 0.5e-3 } } })
t.fails("shared = true is for that", ls.E_GEOMETRY, via { pair = { pitch = 0.7e-3 } })
do -- an exit layer outside the span and layers given twice are named with Lua's numbers
  local _, message, code = via { end_layer = "GND2", connects = { "TOP", "SIG2" } }
  t.equal(code, ls.E_GEOMETRY)
  t.check(message:find("connects[2]", 1, true) and message:find("11 'SIG2'", 1, true) and not message:find("10", 1, true), message)
  _, message, code = via { connects = { "TOP", "SIG1", 5 } }
  t.equal(code, ls.E_ARGUMENT)
  t.check(message:find("connects[3]", 1, true) and message:find("5", 1, true) and not message:find("4", 1, true), message)
  _, message, code = via { start_layer = "SIG2", end_layer = "SIG1" }
  t.equal(code, ls.E_GEOMETRY)
  t.check(message:find("11", 1, true) and message:find("5", 1, true) and not message:find("10", 1, true), message)
end

-- Wrong tables are raised.
t.raises("unknown key 'dril'; allowed: start_layer, end_layer, drill, pad,", via, { dril = 1 })
t.raises("missing key 'drill'", ls.via, board, { connects = { "TOP" } })
t.raises("missing key 'connects'", ls.via, board, { drill = 1e-3 })
t.raises("drill: number expected, got string", via, { drill = "0.25" })
t.raises("connects: table expected, got string", via, { connects = "TOP" })
t.raises("connects[1]: name or number of a layer expected, got table", via, { connects = { {} } })
t.raises("connects[1]: integer expected, got 1.5", via, { connects = { 1.5 } })
t.raises("pads.SIG1: number expected, got string", via, { pads = { SIG1 = "x" } })
t.raises("pads: name or number of a layer expected, got boolean", via, { pads = { [true] = 1e-3 } })
t.raises("returns: missing key 'count'", via, { returns = { distance = 1e-3 } })
t.raises("returns: unknown key 'radius'; allowed: count, distance, drill, wall, xy, spans", via, { returns = { radius = 1 } })
t.raises("returns.wall: not together with", via, { returns = { wall = 1e-3, count = 4 } })
t.raises("returns.wall: not together with xy", via, { returns = { wall = 1e-3, xy = {} } })
t.raises("returns.xy: not together with count", via, { returns = { xy = { { 1e-3, 0 } }, count = 1 } })
t.raises("returns.xy: table expected, got number", via, { returns = { xy = 1e-3 } })
t.raises("returns.xy[1]: table expected, got number", via, { returns = { xy = { 1e-3, 0 } } })
t.raises("returns.xy[2]: { x, y } expected, got 1 items", via, { returns = { xy = { { 1e-3, 0 }, { 1e-3 } } } })
t.raises("returns.xy[1].y: number expected, got string", via, { returns = { xy = { { 1e-3, "0" } } } })
t.raises("hole_dk: number expected, got string", via, { hole_dk = "1" })
t.raises("returns.count: integer expected, got 2.5", via, { returns = { count = 2.5, distance = 1e-3 } })
t.raises("pair: missing key 'pitch'", via, { pair = { shared = true } })
t.raises("pair.shared: boolean expected, got number", via, { pair = { pitch = 1e-3, shared = 1 } })
t.raises("pin.side: 'left' is not one of: top, bottom", via, { pin = { side = "left", length = 1e-3 } })
t.raises("backdrills[1]: missing key 'diameter'", via, { backdrills = { { side = "top", depth = 1e-3 } } })
t.raises("backdrills[1]: table expected, got string", via, { backdrills = { "top" } })
t.raises("nonfunctional_pads: 'yes' is not one of: removed, kept", via, { nonfunctional_pads = "yes" })
t.raises("libstub.stackup expected", ls.via, {}, {})
t.raises("table expected, got nil", ls.via, board, nil)

t.done()
