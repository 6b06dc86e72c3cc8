-- The rockspec lists exactly the sources that are there, and carries the library's version.
--     lua5.4 test_rockspec.lua [ROOT of the project]
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local root = arg[1] or t.dir .. "../.."

local path = root .. "/bindings/lua/libstub-" .. ls.version() .. "-1.rockspec"
local spec = {}
local chunk = t.check(loadfile(path, "t", spec), "cannot load " .. path)
if not chunk then t.done() end
chunk()
t.equal(spec.package, "libstub")
t.equal(spec.version, ls.version() .. "-1")

local listed = {}
for _, name in ipairs(spec.build.modules.libstub.sources) do
  t.check(not listed[name], name .. " is listed twice")
  listed[name] = true
end

local list = assert(io.popen(("cd '%s' && ls libstub/*/*.c bindings/lua/src/*.c"):format(root)))
local count = 0
for name in list:lines() do
  t.check(listed[name], name .. " is not in the rockspec")
  listed[name] = nil
  count = count + 1
end
list:close()
t.check(count > 20)
for name in pairs(listed) do t.check(false, name .. " is in the rockspec, but not there") end

t.done()
