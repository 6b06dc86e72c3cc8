-- Closing, collecting, coroutines: nothing crashes, and every closed object says so.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local fixture = require "fixture"

local registry = debug.getregistry()
local board = fixture.stackup()
local via = fixture.via(board)
local objects = {
  stackup = fixture.stackup(), via = fixture.via(board), model = via:model(),
  plan = ls.plan(board, { { via = via, signal = fixture.signal, criteria = fixture.criteria } }, fixture.capability),
  transition = ls.transition(via, { ports = fixture.ports }), touchstone = ls.touchstone_parse(fixture.touchstone),
  rules = ls.rules_parse "signal A symbol_rate 10 GBd notch_over_nyquist 2\n",
}

-- Closed twice, collected after that; every method of a closed object names it, whatever else is wrong.
for name, object in pairs(objects) do
  local type_name = "libstub." .. name
  local meta = registry[type_name]
  t.equal(meta.__name, type_name)
  t.check(meta.__gc == meta.__close and meta.__gc == meta.__index.close)
  object:close()
  object:close()
  meta.__gc(object)
  t.equal(tostring(object), type_name .. " (closed)")
  for method, f in pairs(meta.__index) do
    if method ~= "close" then t.raises("closed " .. type_name, f, object, 1, 1) end
  end
  if meta.__len then t.raises("closed " .. type_name, function() return #object end) end
end
t.raises("closed libstub.stackup", ls.via, objects.stackup, fixture.options())
t.raises("closed libstub.via", ls.longest_stub, objects.via, fixture.signal, fixture.criteria)
t.raises("closed libstub.via", ls.transition, objects.via, { ports = fixture.ports })
t.raises("vias[1]: closed libstub.via", ls.first_notch_batch, board, { objects.via })
t.raises("jobs[1].via: closed libstub.via", ls.plan, board, { { via = objects.via } }, fixture.capability)
t.raises("rules: closed libstub.rules", ls.board_load, "none.xml", { rules = objects.rules })

-- A method with the wrong object, or none.
for _, name in ipairs { "stackup", "via", "model", "transition", "touchstone", "plan", "rules", "board", "array", "complex" } do
  local meta = registry["libstub." .. name]
  for method, f in pairs(type(meta.__index) == "table" and meta.__index or {}) do
    t.raises("libstub." .. name .. " expected", f, io.stdout, 1, 1)
    t.raises("libstub." .. name .. " expected", f)
  end
  for _, event in ipairs { "__gc", "__close", "__tostring", "__len" } do
    if meta[event] then t.raises("libstub." .. name .. " expected", meta[event], {}) end
  end
end

-- A via needs its stackup; a model, a transition, a plan do not.
do
  local stackup = fixture.stackup()
  local v = fixture.via(stackup)
  local model = v:model()
  local f1 = model:notches(1e12)[1].f
  local transition = assert(ls.transition(v, { ports = fixture.ports }))
  local s21 = transition:s(1e10):re(1, 2, 1)
  stackup:close()
  t.raises("closed libstub.stackup", ls.transition, v, { ports = fixture.ports })
  t.raises("closed libstub.stackup", ls.fit_coupons, stackup, { v }, { 1e10 }, { 1e7 })
  t.raises("closed libstub.stackup", v.stubs, v)
  t.raises("closed libstub.stackup", v.model, v)
  t.raises("closed libstub.stackup", v.check, v)
  t.check(tostring(v):find("connects TOP, SIG1", 1, true))
  t.equal(v:options().connects[2], "SIG1")
  v:close()
  t.equal(model:notches(1e12)[1].f, f1)
  t.equal(model:stub(1).exit_layer, "SIG1")
  t.equal(transition:s(1e10):re(1, 2, 1), s21)
end

-- <close> closes, also when an error leaves the block.
do
  local kept
  local ok = pcall(function()
    local model <close> = via:model()
    local none <close>, message = ls.via(board, fixture.options { drill = -1 })
    kept = model
    t.check(none == nil and message)
    error "out"
  end)
  t.equal(ok, false)
  t.equal(tostring(kept), "libstub.model (closed)")
end

-- A finalizer that closes what is in use: an error, not a crash.
do
  local stackup = fixture.stackup()
  local armed = true
  local function arm()
    if armed then setmetatable({}, { __gc = function() stackup:close() arm() end }) end
  end
  arm()
  collectgarbage("generational")
  local ok, message = true, nil
  for _ = 1, 200 do
    ok, message = pcall(function()
      local v = assert(ls.via(stackup, fixture.options()))
      return v:model(), v:stubs(), stackup:layers()
    end)
    if not ok then break end
  end
  armed = false
  collectgarbage("incremental")
  collectgarbage()
  t.check(not ok and message:find("closed libstub.stackup", 1, true), tostring(message))
end

-- Callbacks that collect, close and call again: the library is in the middle of something of its own.
do
  local pieces, parsed = { fixture.touchstone }, nil
  local file = assert(ls.touchstone_read(function()
    collectgarbage()
    parsed = ls.touchstone_parse(fixture.touchstone)
    parsed:close()
    return table.remove(pieces)
  end))
  local data = file:get()
  local count = 0
  assert(ls.touchstone_write(data, function()
    count = count + 1
    data.data, data.freq, data.reference = nil, nil, nil
    file:close()
    collectgarbage()
    if count < 3 then ls.touchstone_write(ls.touchstone_parse(fixture.touchstone):get(), function() collectgarbage() end) end
  end))
  t.check(count > 0)
  local fit = ls.fit_in_plane_dk(function(ratio)
    collectgarbage()
    return 1e10 / math.sqrt(ratio) * ls.fit_in_plane_dk(function(r) return 1e10 / math.sqrt(r) end, { 1e10 }, { 1e6 }).ratio
  end, { 0.95e10 }, { 1e7 })
  t.close(fit.ratio, 1 / 0.95 ^ 2, 1e-6)
end

-- The collector knows what is behind a handle: many models do not pile up.
do
  local before = collectgarbage("count")
  local most = 0
  for _ = 1, 500 do
    via:model()
    most = math.max(most, collectgarbage("count"))
  end
  t.check(most < before + 4096, ("%.0f KiB more"):format(most - before))
end

-- In coroutines, across yields; objects pass between them.
do
  local function worker(n)
    local sum = 0
    for i = 1, n do
      local model <close> = via:model()
      sum = sum + model:added_loss(i * 1e9)
      coroutine.yield(model:notches(1e12)[1].f)
    end
    return sum
  end
  local one, two = coroutine.wrap(worker), coroutine.wrap(worker)
  local a, b
  for _ = 1, 4 do a, b = one(4), two(4) end
  t.equal(a, b)
  t.equal(one(), two())
  local unfinished = coroutine.create(worker)
  coroutine.resume(unfinished, 3)
  t.equal(coroutine.close(unfinished), true)
  -- an object made in a coroutine outlives it
  local made
  coroutine.wrap(function() made = via:model() end)()
  collectgarbage()
  t.equal(made:notches(1e12)[1].f, a)
end

-- Deep in the stack and with few slots left.
do
  local function deep(n) return n == 0 and #via:model():notches(1e12) or (deep(n - 1)) end
  t.equal(deep(150), #via:model():notches(1e12))
end

-- Loading twice gives the same module; loaded anew, a fresh one that works with the old objects.
t.check(require "libstub" == ls)
package.loaded.libstub = nil
local anew = require "libstub"
t.check(anew ~= ls)
t.equal(anew.longest_stub(via, fixture.signal, fixture.criteria).length, ls.longest_stub(via, fixture.signal, fixture.criteria).length)
package.loaded.libstub = ls

t.done()
