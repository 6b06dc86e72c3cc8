-- The values from outside that C, Python and Lua all read: tests/data/check_values.csv.
--     lua5.4 check_values.lua [TABLE]
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"

-- Functions with several results, in their order.
local outputs = {
  coax = { "capacitance", "inductance", "impedance" },
  twin_rod = { "odd_inductance", "differential_impedance" },
}

-- "a=1 b=2" as a table, every value a number.
local function arguments(text)
  local args = {}
  for word in text:gmatch("%S+") do
    local name, value = word:match("^([%w_]+)=(%S+)$")
    assert(name and tonumber(value), "not name=value: " .. word)
    assert(args[name] == nil, "given twice: " .. name)
    args[name] = math.tointeger(tonumber(value)) or tonumber(value)
  end
  return args
end

local special = {}

function special.dielectric_permittivity(output, args)
  local freq = args.freq
  args.freq = nil
  local re, im = assert(ls.dielectric_permittivity(args, freq))
  if output == "through_plane_re" then return re end
  if output == "loss_tangent" then return -im / re end
  error("unknown output " .. tostring(output))
end

local function evaluate(name, output, args)
  if special[name] then return special[name](output, args) end
  local f = ls[name]
  assert(type(f) == "function", "unknown function " .. name)
  local names = outputs[name] or { output }
  for i, one in ipairs(names) do
    if one == output then
      local results = table.pack(f(args))
      assert(results[1], results[2])
      return results[i]
    end
  end
  assert(output == nil and not outputs[name], ("%s has no output '%s'"):format(name, tostring(output)))
  return (assert(f(args)))
end

-- Fields of a line; quoted ones may hold commas and doubled quotes.
local function fields(line)
  local list, at = {}, 1
  while at <= #line + 1 do
    if line:sub(at, at) == '"' then
      local value, stop = "", at
      repeat
        local part, next_at = line:match('^"([^"]*)"()', stop)
        assert(part, "open quote: " .. line)
        value, stop = value .. (stop > at and '"' or "") .. part, next_at
      until line:sub(stop, stop) ~= '"'
      list[#list + 1], at = value, stop + 1
    else
      local value, stop = line:match("^([^,]*)()", at)
      list[#list + 1], at = value, stop + 1
    end
  end
  return list
end

local columns = "id,function,arguments,expected,rel_tol,abs_tol,source"
local rows = 0
local path = arg[1] or t.dir .. "../data/check_values.csv"
for line in assert(io.open(path)):lines() do
  if rows == 0 and line == columns then goto continue end
  local row = fields(line)
  t.equal(#row, 7, "columns of " .. line)
  local id, name, args, expected, rel, abs, source = table.unpack(row)
  local base, output = name:match("^([%w_]+):?([%w_]*)$")
  expected, rel, abs = tonumber(expected), tonumber(rel), tonumber(abs)
  if t.check(base and expected and rel and abs and source ~= "", id .. ": a number or the source is missing") then
    if output == "" then output = nil end
    local ok, value = pcall(evaluate, base, output, arguments(args))
    if t.check(ok, id .. ": " .. tostring(value)) then
      t.close(value, expected, rel, abs, id .. " (" .. source .. ")")
    end
  end
  rows = rows + 1
  ::continue::
end
t.check(rows >= 20, "only " .. rows .. " rows in " .. path)
print(rows .. " rows")
t.done()
