-- What the test scripts share: checks that print file:line when they fail, and an exit code that tells.
--
--     local t = require "harness"
--     t.check(1 + 1 == 2)
--     t.done()
local t = { dir = arg[0]:match("^.*/") or "./" }

local checks, failures = 0, 0

-- The line of the test script that called the check.
local function caller()
  local level = 3
  while true do
    local info = debug.getinfo(level, "Sl")
    if not info then return "?" end
    if not info.source:match("harness%.lua$") and info.currentline > 0 then
      return info.short_src .. ":" .. info.currentline
    end
    level = level + 1
  end
end

local function report(fine, message)
  checks = checks + 1
  if not fine then
    failures = failures + 1
    io.stderr:write(caller(), ": ", message, "\n")
  end
  return fine
end

local function text(value)
  return type(value) == "number" and math.type(value) == "float" and ("%.17g"):format(value) or tostring(value)
end

function t.check(value, message)
  report(value, message or "check failed")
  return value
end

function t.equal(got, want, message)
  return report(got == want and math.type(got) == math.type(want),
    ("%sgot %s, want %s"):format(message and message .. ": " or "", text(got), text(want)))
end

-- Within rel of want or within abs, whichever is wider.
function t.close(got, want, rel, abs, message)
  local fine = type(got) == "number" and math.abs(got - want) <= math.max(rel * math.abs(want), abs or 0)
  return report(fine, ("%sgot %s, want %s, rel %g, abs %g"):format(message and message .. ": " or "", text(got), text(want),
    rel, abs or 0))
end

-- The call must raise an error whose text contains `part`.
function t.raises(part, f, ...)
  local ok, message = pcall(f, ...)
  return report(not ok and tostring(message):find(part, 1, true) ~= nil,
    ok and "no error raised, want: " .. part or ("got error: %s, want: %s"):format(tostring(message), part))
end

-- nil, message, code: the values of a call that must fail so. t.fails("part", ls.E_NONE, call(...))
function t.fails(part, code, value, message, got_code, ...)
  local fine = value == nil and type(message) == "string" and message:find(part, 1, true) ~= nil and got_code == code
    and select("#", ...) == 0
  return report(fine, ("got %s, %s, %s; want nil, ...%s..., %s"):format(text(value), text(message), text(got_code), part,
    text(code)))
end

function t.skip(message)
  print("skipped: " .. message)
  os.exit(failures == 0 and 77 or 1, true)
end

function t.read(path)
  local file = io.open(path, "rb")
  local data = file and file:read("a")
  if file then file:close() end
  return data
end

-- Ends the script; one without a single check has failed.
function t.done()
  print(("%d checks, %d failed"):format(checks, failures))
  os.exit(failures == 0 and checks > 0, true)
end

return t
