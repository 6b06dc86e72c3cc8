-- Touchstone files: read from paths, strings, files and functions, written likewise, and what is refused.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"

local folder = t.dir .. "../data/touchstone/"
local amplifier = folder .. "amplifier.s2p"

local file = assert(ls.touchstone_load(amplifier))
t.equal(tostring(file), "libstub.touchstone: 2 ports, 3 points")
local d = file:get()
t.equal(d.version, 1)
t.equal(d.ports, 2)
t.equal(d.parameter, "S")
t.equal(d.format, "MA")
t.equal(d.unit, "MHz")
t.equal(d.matrix, "full")
t.equal(d.order, "21_12")
t.equal(d.points, 3)
t.equal(d.noise_points, 2)
t.equal(table.concat(d.freq:totable(), " "), "1000000000.0 2000000000.0 3000000000.0")
t.equal(table.concat(d.reference:totable(), " "), "75.0 75.0")
t.equal(d.rows, nil)
t.equal(d.comments[1], " an amplifier of no make")
t.equal(#d.data, 3)
t.equal(d.data:ports(), 2)
t.close(d.data:im(1, 1, 1), -0.5, 1e-15)
t.close(d.data:re(1, 2, 1), -4, 1e-15)
t.close(d.data:im(1, 1, 2), 0.05, 1e-15)
t.close(d.data:re(1, 2, 2), 0.25, 1e-15)

-- Every way in gives the same numbers.
local text = t.read(amplifier)
local function same(a, b)
  for _, key in ipairs { "version", "ports", "parameter", "format", "unit", "matrix", "order", "points", "noise_points" } do
    t.equal(a[key], b[key], key)
  end
  t.equal(table.concat(a.comments, "\n"), table.concat(b.comments, "\n"))
  for _, key in ipairs { "freq", "reference" } do
    t.equal(table.concat(a[key]:totable(), " "), table.concat(b[key]:totable(), " "))
  end
  t.equal(table.concat(a.data:interleaved():totable(), " "), table.concat(b.data:interleaved():totable(), " "))
end
same(d, ls.touchstone_parse(text):get())
same(d, ls.touchstone_parse(text, { ports = 2 }):get())
do
  local stream <close> = io.open(amplifier, "rb")
  same(d, ls.touchstone_read(stream):get())
  local at, asked = 1, nil
  same(d, ls.touchstone_read(function(bytes)
    asked = bytes
    at = at + 7
    return at <= #text + 7 and text:sub(at - 7, at - 1) or nil
  end):get())
  t.check(math.type(asked) == "integer" and asked > 0)
  local whole = text
  same(d, ls.touchstone_read(function()
    local piece = whole
    whole = nil
    return piece
  end):get())
end

-- Mixed mode of version 2, half a matrix, other ports' references; ports in a file of version 1 that cannot say how many.
d = assert(ls.touchstone_load(folder .. "pair.ts")):get()
t.equal(d.version, 2)
t.equal(d.matrix, "lower")
t.equal(d.ports, 4)
local rows = {}
for i, row in ipairs(d.rows) do rows[i] = ("%s %d %s"):format(row.kind, row.port, row.partner or "-") end
t.equal(table.concat(rows, ", "), "differential 1 3, common 1 3, single 4 -, single 2 -")
t.equal(d.data:re(1, 1, 4), d.data:re(1, 4, 1))
t.equal(assert(ls.touchstone_load(folder .. "stage.ts")):get().order, "12_21")
local three = assert(ls.touchstone_load(folder .. "splitter.s3p")):get()
t.equal(three.data:re(2, 3, 1), 1.7)
t.equal(ls.touchstone_parse(t.read(folder .. "splitter.s3p")):get().ports, 3)

-- Written and read again: the same numbers to the bit.
local path = os.tmpname()
local function there_and_back(data)
  t.equal(ls.touchstone_save(data, path), true)
  local again = assert(ls.touchstone_load(path, { ports = #data.reference })):get()
  same(data, again)
  local parts = {}
  t.equal(ls.touchstone_write(data, function(part) parts[#parts + 1] = part end), true)
  t.equal(table.concat(parts), t.read(path))
  do
    local stream <close> = io.open(path, "wb")
    t.equal(ls.touchstone_write(data, stream), true)
  end
  t.equal(table.concat(parts), t.read(path))
  return again
end
for i, row in ipairs(there_and_back(d).rows) do
  t.check(row.kind == d.rows[i].kind and row.port == d.rows[i].port and row.partner == d.rows[i].partner)
end
there_and_back(three)
local made = { freq = { 1e9, 2.5e9 }, data = ls.complex({ 0.1, -0.2, 1 / 3, 0, 0.5, 1e-17, -1, 0 , 1, 2, 3, 4, 5, 6, 7, 8 }, 2),
  reference = 75, unit = "GHz", parameter = "Z", comments = { " made" } }
t.equal(ls.touchstone_save(made, path), true)
local back = assert(ls.touchstone_load(path, { ports = 2 })):get()
t.equal(table.concat(back.data:interleaved():totable(), " "), table.concat(made.data:interleaved():totable(), " "))
t.equal(back.parameter, "Z")
t.equal(back.reference[2], 75.0)
t.equal(back.unit, "GHz")
t.equal(back.comments[1], " made")
made.digits, made.parameter, made.reference = 3, nil, nil
assert(ls.touchstone_save(made, path))
t.equal(assert(ls.touchstone_load(path, { ports = 2 })):get().data:re(1, 1, 2), 0.333)
made.digits = nil

-- What a sink does to the caller's table does not reach the writer.
do
  local comments = {}
  for i = 1, 500 do comments[i] = (" comment %d "):format(i) .. ("x"):rep(40) end
  made.comments = comments
  local want, got = {}, {}
  assert(ls.touchstone_write(made, function(part) want[#want + 1] = part end))
  assert(ls.touchstone_write(made, function(part)
    got[#got + 1] = part
    for i = #comments, 1, -1 do comments[i] = nil end
    collectgarbage()
  end))
  t.equal(table.concat(got), table.concat(want))
  made.comments = nil
end

-- A closed file; a file without a path.
file:close()
t.raises("closed libstub.touchstone", file.get, file)
t.equal(tostring(file), "libstub.touchstone (closed)")

-- Refused: with line and column, as the file counts them.
t.fails("cannot read", ls.E_READ, ls.touchstone_load(folder .. "nothing.s2p"))
t.fails("line 2, column", ls.E_FORMAT, ls.touchstone_parse("# GHz S RI R 50\n1 0.1 x\n", { ports = 1 }))
t.fails("line 3", ls.E_FORMAT, ls.touchstone_parse("# GHz S RI R 50\n2 0.1 0\n1 0.1 0\n", { ports = 1 }))
t.fails("line", ls.E_FORMAT, ls.touchstone_parse(""))
t.fails("ports = 17", ls.E_ARGUMENT, ls.touchstone_parse("", { ports = 17 }))
t.fails("ports = -1", ls.E_ARGUMENT, ls.touchstone_parse("", { ports = -1 }))
t.fails("freq[2] = 1e+09 Hz after 2e+09 Hz: must rise", ls.E_ARGUMENT,
  ls.touchstone_save({ freq = { 2e9, 1e9 }, data = made.data }, path))
t.fails("data[1][2][1]", ls.E_ARGUMENT, ls.touchstone_save({ freq = { 1e9 }, data = ls.complex({ 0, 0, 0, 0, 0 / 0, 0, 0, 0 }, 2) }, path))
t.fails("data[1]: [2][1] and [1][2] differ", ls.E_ARGUMENT,
  ls.touchstone_save({ freq = { 1e9, 2e9 }, data = made.data, version = 2, matrix = "lower" }, path))
t.fails("matrix: only version 2 has this", ls.E_ARGUMENT, ls.touchstone_save({ freq = { 1e9, 2e9 }, data = made.data, matrix = "lower" }, path))
t.fails("reference of port 2 = -50 ohm", ls.E_ARGUMENT, ls.touchstone_save({ freq = { 1e9, 2e9 }, data = made.data, reference = { 50, -50 } }, path))
t.fails("comments[2]: must be one line", ls.E_ARGUMENT, ls.touchstone_save({ freq = { 1e9, 2e9 }, data = made.data, comments = { "a", "b\nc" } }, path))
t.fails("points = 0", ls.E_ARGUMENT, ls.touchstone_save({ freq = {}, data = ls.complex({}, 2) }, path))
t.fails("digits = 18", ls.E_ARGUMENT, ls.touchstone_save({ freq = { 1e9, 2e9 }, data = made.data, digits = 18 }, path))
t.fails("cannot write", ls.E_WRITE, ls.touchstone_save(made, "/nowhere/x.s2p"))
t.equal(assert(ls.touchstone_load(path, { ports = 2 })):get().points, 2)      -- what stood there still stands

-- Streams that end, fail, raise.
t.fails("sink", ls.E_WRITE, ls.touchstone_write(made, function() return false end))
t.raises("no more room", ls.touchstone_write, made, function() error "no more room" end)
t.raises("out of luck", ls.touchstone_read, function() error "out of luck" end)
t.raises("the source must return strings, and nil at the end, not a number", ls.touchstone_read, function() return 1 end)
t.raises("attempt to yield", ls.touchstone_read, function() coroutine.yield() end)
t.fails("line", ls.E_FORMAT, ls.touchstone_read(function() end))
do
  local kept = { "an object" }
  local ok, message = pcall(ls.touchstone_read, function() error(kept) end)
  t.check(not ok and message == kept)
  local stream = io.open(path, "wb")
  t.fails("cannot read", ls.E_READ, ls.touchstone_read(stream))
  stream:close()
  t.raises("closed file", ls.touchstone_read, stream)
  t.raises("closed file", ls.touchstone_write, made, stream)
  local readable <close> = io.open(amplifier, "rb")
  readable:setvbuf("no")
  t.fails("sink", ls.E_WRITE, ls.touchstone_write(made, readable))
end

-- Wrong calls.
t.raises("unknown key 'port'; allowed: ports", ls.touchstone_load, path, { port = 2 })
t.raises("ports: integer expected, got 1.5", ls.touchstone_load, path, { ports = 1.5 })
t.raises("string expected, got number", ls.touchstone_load, 1)
t.raises("string contains a zero byte", ls.touchstone_load, "a\0b")
t.raises("file or function expected, got table", ls.touchstone_read, {})
t.raises("file or function expected, got nil", ls.touchstone_write, made, nil)
t.raises("missing key 'data'", ls.touchstone_save, { freq = {} }, path)
t.raises("missing key 'freq'", ls.touchstone_save, { data = made.data }, path)
t.raises("data: libstub.complex expected, got table", ls.touchstone_save, { freq = {}, data = {} }, path)
t.raises("freq: 1 frequencies for 2 matrices", ls.touchstone_save, { freq = { 1 }, data = made.data }, path)
t.raises("ports: 3, but data has 2", ls.touchstone_save, { freq = { 1, 2 }, data = made.data, ports = 3 }, path)
t.raises("points: 1, but data has 2", ls.touchstone_save, { freq = { 1, 2 }, data = made.data, points = 1 }, path)
t.raises("reference: 3 numbers for 2 ports", ls.touchstone_save, { freq = { 1, 2 }, data = made.data, reference = { 1, 2, 3 } }, path)
t.raises("format: 'ri' is not one of: RI, MA, DB", ls.touchstone_save, { freq = { 1, 2 }, data = made.data, format = "ri" }, path)
t.raises("rows: 1 rows for 2 ports", ls.touchstone_save, { freq = { 1, 2 }, data = made.data, rows = { {} } }, path)
t.raises("rows[2]: missing key 'port'", ls.touchstone_save,
  { freq = { 1, 2 }, data = made.data, rows = { { kind = "single", port = 1 }, { kind = "single" } } }, path)
t.raises("rows[1].port: must be 1 to 2", ls.touchstone_save, { freq = { 1, 2 }, data = made.data, rows = { { kind = "single", port = 3 }, {} } }, path)
t.raises("comments[2]: string expected, got number", ls.touchstone_save, { freq = { 1, 2 }, data = made.data, comments = { "", 1 } }, path)
t.raises("unknown key 's'; allowed: version, ports", ls.touchstone_save, { s = 1 }, path)

os.remove(path)
t.done()
