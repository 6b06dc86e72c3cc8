-- Every function and method with arguments that make no sense: an error or an answer, never a crash, whatever they are.
--     lua5.4 test_nonsense.lua [CALLS [SEED]]
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local fixture = require "fixture"

local calls, seed = tonumber(arg[1]) or 30000, tonumber(arg[2]) or 1
math.randomseed(seed)
local random = math.random

local path = fixture.write_file(fixture.board_xml())
local stackup = fixture.stackup()
local via = fixture.via(stackup)
local rules = ls.rules_parse(fixture.rules)
local board = ls.board_load(path, { rules = rules })
local transition = ls.transition(via, { ports = fixture.ports })
local touchstone = ls.touchstone_parse(fixture.touchstone)
local data = touchstone:get()
local closed = fixture.via(stackup):model()
closed:close()
local objects = {
  stackup, via, via:model(), rules, board, board:plan(rules), board:stackup(), board:via(1), board:via(6), closed,
  ls.array { 1e9, 2e9 }, ls.array(0), via:model():zin { 1e9 }, transition, touchstone, data.data, data.freq,
  ls.complex({}, 4), transition:s { 1e9, 2e9 },
}
-- No string here may be a place that can be written to, and no whole number so large that it is gigabytes of array.
local plain = {
  true, false, 0, 1, 2, 3, -1, 1.5, 1e-4, 2.5e-4, 1e9 + 0.5, 5e10 + 0.5, 1e300, -1e300, math.huge, -math.huge, 0 / 0, math.maxinteger,
  math.mininteger, "", "/nowhere/x", "a\0b", print, coroutine.create(print), io.stdout,
}
local words = {
  "top", "bottom", "both", "all", "bulk", "loaded", "ladder", "cavity", "plane", "signal", "mixed", "dielectric", "kept",
  "worst", "rss", "S", "Z", "ABCD", "H", "RI", "DB", "GHz", "lower", "12_21", "differential", "odd", "even", "coax", "trace",
  "microstrip", "stripline", "spheres", "removed", "perfect", "radiates", "TOP", "SIG1", "GND1", "R1", "BOTTOM",
}
local keys = {
  "name", "kind", "thickness", "tol_plus", "tol_minus", "dk", "in_plane_ratio", "loss_tangent", "f_ref", "conductivity",
  "start_layer", "end_layer", "drill", "pad", "pad_inner", "antipad", "pads", "antipads", "clear", "connects", "returns",
  "xy", "outside_dk", "lid_distance", "hole_dk", "pair", "backdrills", "pin", "count", "distance", "wall", "pitch", "shared", "side", "length", "depth", "diameter",
  "fidelity", "z_ref", "annuli", "stub", "symbol_rate", "levels", "notch_over_nyquist", "added_loss_db", "via",
  "signal", "criteria", "sides", "spans", "edges", "left", "right", "front", "back", "ports", "layer", "trace", "impedance", "distance",
  "to", "from", "mode", "stubs", "metal", "rise_time", "port", "t0", "window", "f_low", "f_high", "with_offset", "data", "freq",
  "reference", "rows", "comments", "format", "unit", "matrix", "version", "digits", "roughness_law", "dielectric_below", "conductor", "depths", "depth_tolerance", "rules", "progress", "n", "f", "TOP", "SIG1", 1, 2, 3, true,
}

local function pick(list) return list[random(#list)] end

local nonsense

local function table_of(depth)
  local made = {}
  for _ = 1, random(0, 4) do
    if random() < 0.3 then made[#made + 1] = nonsense(depth - 1) else made[pick(keys)] = nonsense(depth - 1) end
  end
  return made
end

-- Sensible ones too, a little spoiled, so that calls get further than their first check.
local function spoiled(good, depth)
  local order = {}
  for key in pairs(good) do order[#order + 1] = key end
  table.sort(order, function(x, y) return tostring(x) < tostring(y) end)
  local key = pick(order)
  if random() < 0.7 then good[key] = nonsense(depth - 1) end
  return good
end

local sensible = {
  function() return fixture.options() end,
  function() return fixture.layers() end,
  function() return { symbol_rate = 25e9, levels = 2 } end,
  function() return { notch_over_nyquist = 2 } end,
  function() return { { via = via, signal = { symbol_rate = 25e9 }, criteria = { added_loss_db = 1 } }, { via = via } } end,
  function() return { depth_tolerance = 5e-5, sides = "both" } end,
  function() return { via, via } end,
  function() return { 1e9, 2e9, 3e9 } end,
  function() return { side = "bottom" } end,
  function() return { ports = fixture.ports } end,
  function() return { { layer = "TOP", impedance = 50 }, { layer = "SIG1", impedance = 45, dk = 3.6 } } end,
  function() return { rise_time = 1e-10, to = 2, from = 1 } end,
  function() return { freq = { 1e9, 2e9, 3e9 }, data = data.data, reference = 50 } end,
  function() return { { 1, 2 } } end,
  function() return { kind = "stripline", width = 1e-4, height_below = 1e-4, height_above = 1e-4, dielectric_below = { dk = 4 } } end,
  function() return { window = 1e8, to = 1, from = 2 } end,
  function() return { left = 1e-2, right = 1e-2, front = 1e-2, back = 1e-2, shorted = true } end,
}

function nonsense(depth)
  local dice = random()
  if dice < 0.35 then return pick(objects) end
  if dice < 0.5 then return pick(plain) end
  if dice < 0.6 then return depth < 2 and pick(words) or pick(plain) end
  if depth <= 0 then return nil end
  if dice < 0.75 then return table_of(depth) end
  return spoiled(pick(sensible)(), depth)
end

local functions, names = {}, {}
local function add(name, f)
  names[#names + 1] = name
  functions[name] = f
end
for name, f in pairs(ls) do if type(f) == "function" then add("libstub." .. name, f) end end
for _, type_name in ipairs { "stackup", "via", "model", "transition", "touchstone", "plan", "rules", "board", "complex" } do
  for name, f in pairs(debug.getregistry()["libstub." .. type_name].__index) do
    if name ~= "close" then add(type_name .. ":" .. name, f) end
  end
end
table.sort(names)

local of_type = { stackup = { 1, 7 }, via = { 2, 8, 9 }, model = { 3, 10 }, rules = { 4 }, board = { 5 }, plan = { 6 },
  complex = { 14, 17, 19, 20 }, transition = { 15 }, touchstone = { 16 } }
local answered, raised = 0, 0
for i = 1, calls do
  local name = names[(i - 1) % #names + 1]
  local self = of_type[name:match("^(%w+):")]
  local arguments = { self and random() < 0.95 and objects[pick(self)] or nonsense(2), nonsense(2), nonsense(2), nonsense(2),
    nonsense(2), nonsense(2) }
  local results = table.pack(pcall(functions[name], table.unpack(arguments, 1, random(1, 5))))
  if results[1] then
    answered = answered + 1
    -- nil comes with a message and a code, but for match, which may know no signal
    if results[2] == nil and name ~= "rules:match" and results.n > 1 then
      t.check(type(results[3]) == "string" and math.type(results[4]) == "integer" and results[4] < 0, name)
    end
  else
    raised = raised + 1
    t.check(type(results[2]) == "string" and not results[2]:find("do not fit", 1, true), name .. ": " .. tostring(results[2]))
  end
end
os.remove(path)
print(("seed %d: %d answered, %d raised"):format(seed, answered, raised))
t.check(answered > calls / 20 and raised > calls / 20)
t.done()
