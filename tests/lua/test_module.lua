-- The module's names against the headers and against its documentation; constants, versions, units.
--     lua5.4 test_module.lua [ROOT of the project]
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local root = arg[1] or t.dir .. "../.."

local function read(name)
  return assert(t.read(root .. "/" .. name), "cannot read " .. name)
end
local header, board_header = read "libstub/include/libstub.h", read "libstub/include/libstub_ipc2581.h"

t.equal(ls.version(), header:match('#define LSTUB_VERSION "([^"]+)"'))
t.equal(ls.abi(), tonumber(header:match("#define LSTUB_ABI%s+(%d+)")))
t.equal(math.type(ls.model_revision()), "integer")
t.raises("unexpected argument", ls.version, 1)

-- Every status constant of the header, with its value.
local statuses = 0
for name, value in header:gmatch("#define LSTUB_([EW]_%u+)%s+%(?(%-?%d+)%)?") do
  t.equal(ls[name], math.tointeger(value), name)
  t.equal(ls.status_name(math.tointeger(value)), "LSTUB_" .. name)
  statuses = statuses + 1
end
t.check(statuses >= 14)
t.equal(ls.OK, 0)
t.equal(ls.status_name(-999), "unknown status")
t.raises("number expected", ls.status_name, "x")

t.equal(ls.mil(10), 10 * 25.4e-6)
t.equal(ls.mm(0.25), 0.25 * 1e-3)
t.equal(ls.um(35), 35 * 1e-6)
t.equal(ls.inch(1), 25.4e-3)
t.equal(ls.ghz(28), 28e9)
t.equal(ls.gbd(53.125), 53.125e9)
t.raises("number expected, got string", ls.mil, "10")
t.raises("number expected, got no value", ls.mil)
t.raises("unexpected argument", ls.mil, 1, 2)

-- ---- every function of the headers is here, or is missing for a reason ----

local reasons = {    -- of C alone
  lstub_init = "initialises C structs",
}
local objects = { "stackup", "via", "model", "transition", "touchstone", "plan", "rules", "board" }
local registry = debug.getregistry()

local function methods_of(name)
  local index = registry["libstub." .. name].__index
  if type(index) == "function" then
    local _, methods = debug.getupvalue(index, 1)
    return methods
  end
  return index
end

-- Where a C function is found: in the module, or as a method of its first argument.
local function found(c_name)
  local name = c_name:gsub("^lstub_", ""):gsub("^network_", "")
  if ls[name] then return true end
  for _, object in ipairs(objects) do
    local rest = name:match("^" .. object .. "_(.+)$")
    if rest == "create" then
      return object == "model" and methods_of("via").model ~= nil or ls[object] ~= nil
    elseif rest then
      return methods_of(object)[rest == "destroy" and "close" or rest] ~= nil
    end
  end
  return methods_of("model")[name] ~= nil
end

local functions = 0
for _, text in ipairs { header, board_header } do
  for c_name in text:gmatch("LSTUB_API[^\n(]-(lstub_[%w_]+)%s*%(") do
    functions = functions + 1
    t.check(reasons[c_name] or found(c_name), c_name .. " is not in the module")
  end
end
t.check(functions > 100, "only " .. functions .. " functions found in the headers")

-- ---- every name is documented, and nothing else ----

local documentation = ""
for _, name in ipairs { "libstub", "libstub_formulas", "libstub_network", "libstub_ipc2581" } do
  local part = read("bindings/lua/" .. name .. ".d.lua")
  t.check(load(part))
  documentation = documentation .. part
end
local documented = {}
local undescribed = 0
local previous = ""
for line in documentation:gmatch("[^\n]*") do
  local object, separator, name = line:match("^function ([%w_]+)([.:])([%w_]+)%(")
  if not object then
    object, name = line:match("^(libstub)%.([%u_]+) = %-?%d+$")
    separator = "."
  end
  if object then
    local key = object .. separator .. name
    t.check(not documented[key], key .. " is documented twice")
    documented[key] = true
    if not previous:match("^%-%-%-") and not name:match("^E_") then undescribed = undescribed + 1 end
  end
  previous = line
end
t.equal(undescribed, 0, "functions without a comment")

local real = {}
for name in pairs(ls) do real["libstub." .. name] = true end
for _, object in ipairs { "array", "complex", table.unpack(objects) } do
  for name in pairs(methods_of(object)) do real[object .. ":" .. name] = true end
end
for name in pairs(real) do t.check(documented[name], name .. " is not documented") end
for name in pairs(documented) do t.check(real[name], name .. " is documented, but is not there") end

t.done()
