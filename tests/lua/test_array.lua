-- Arrays of real and complex numbers.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"

local a = ls.array { 1, 2.5, -3 }
t.equal(#a, 3)
t.equal(a[1], 1.0)
t.equal(a[3], -3.0)
t.equal(a[0], nil)
t.equal(a[4], nil)
t.equal(a[1.5], nil)
t.equal(a.nothing, nil)
a[2] = 7
t.equal(a[2], 7.0)
t.equal(table.concat(a:totable(), " "), "1.0 7.0 -3.0")
local n = 0
for i, value in ipairs(a) do
  n = n + 1
  t.equal(value, a[i])
end
t.equal(n, 3)
t.equal(tostring(a), "libstub.array: 3 numbers")
t.equal(#ls.array(5), 5)
t.equal(ls.array(5)[5], 0.0)
t.equal(#ls.array(0), 0)
t.equal(#ls.array {}, 0)

-- A copy is a copy.
local b = ls.array(a)
b[1] = 100
t.equal(a[1], 1.0)

t.raises("index 4: must be 1 to 3", function() a[4] = 1 end)
t.raises("index 0: must be 1 to 3", function() a[0] = 1 end)
t.raises("number expected, got string", function() a[1] = "1" end)
t.raises("number expected, got nil", function() a[1] = nil end)
t.raises("number expected, got string", function() a["1"] = 1 end)
t.raises("number expected", function() a.x = 1 end)
t.raises("item 2: number expected, got table", ls.array, { 1, {} })
t.raises("count must be >= 0", ls.array, -1)
t.raises("not enough memory", ls.array, math.maxinteger)
t.raises("not enough memory", ls.array, math.maxinteger // 64)
t.raises("no integer representation", ls.array, 1.5)
t.raises("unexpected argument", ls.array, 1, 2)
t.raises("value expected", ls.array)

-- The same points as NumPy's: first + i step, the last one exact.
local f = ls.linspace(1e9, 67e9, 2000)
t.equal(#f, 2000)
t.equal(f[1], 1e9)
t.equal(f[2000], 67e9)
t.equal(f[1000], 999 * ((67e9 - 1e9) / 1999) + 1e9)
t.equal(ls.linspace(3, 9, 1)[1], 3.0)
t.raises("count must be >= 1", ls.linspace, 1, 2, 0)
t.raises("number expected", ls.linspace, 1, "2", 3)

-- Complex: parts of one and of all.
local z = ls.dielectric_permittivity({ dk = 4, loss_tangent = 0.02 }, { 1e9, 1e10 })
t.equal(#z, 2)
t.equal(tostring(z), "libstub.complex: 2 values")
local re, im = z:get(2)
t.check(re == z:re(2) and im == z:im(2) and im < 0)
t.close(z:abs(2), math.sqrt(re * re + im * im), 1e-15)
t.close(z:arg(2), math.atan(im, re), 1e-15)
t.close(z:db(2), 20 * math.log(math.sqrt(re * re + im * im), 10), 1e-14)
t.equal(#z:abs(), 2)
t.equal(z:abs()[2], z:abs(2))
t.equal(z:interleaved()[4], im)
t.equal(#z:interleaved(), 4)
t.raises("index 3: must be 1 to 2", z.re, z, 3)
t.raises("index 0: must be 1 to 2", z.get, z, 0)
t.raises("libstub.complex expected, got libstub.array", z.re, a, 1)

-- Matrices: (i, to, from), row by row, and their elements as lists.
local m = ls.complex({ 11, -11, 12, -12, 21, -21, 22, -22, 111, 0, 112, 0, 121, 0, 122, 0 }, 2)
t.equal(tostring(m), "libstub.complex: 2 matrices of 2 ports")
t.equal(#m, 2)
t.equal(m:ports(), 2)
t.equal(m:re(1, 2, 1), 21.0)
t.equal(m:im(1, 1, 2), -12.0)
t.equal(m:re(2, 2, 2), 122.0)
t.equal(select("#", m:get(2, 1, 1)), 2)
t.equal(table.concat(m:element(2, 1):re():totable(), " "), "21.0 121.0")
t.equal(m:element(2, 1):ports(), 1)
t.equal(#m:re(), 8)
t.equal(m:re()[7], 121.0)
t.equal(m:interleaved()[6], -21.0)
t.equal(z:ports(), 1)
t.equal(z:re(1, 1, 1), z:re(1))
t.equal(#z:element(1, 1), 2)
local list = ls.complex { 1, 2, 3, 4 }
t.equal(tostring(list), "libstub.complex: 2 values")
t.equal(list:im(2), 4.0)
t.equal(#ls.complex({}, 4), 0)
t.equal(ls.complex(m:interleaved(), 2):re(2, 1, 2), 112.0)
t.raises("number expected, got no value", m.re, m, 1)
t.raises("number expected, got no value", m.re, m, 1, 1)
t.raises("index 3: must be 1 to 2", m.get, m, 1, 3, 1)
t.raises("index 0: must be 1 to 2", m.element, m, 0, 1)
t.raises("index 2: must be 1 to 1", z.re, z, 1, 2, 1)
t.raises("unexpected argument", m.re, m, 1, 1, 1, 1)
t.raises("6 numbers: must be a multiple of 8", ls.complex, { 1, 2, 3, 4, 5, 6 }, 2)
t.raises("3 numbers: must be a multiple of 2", ls.complex, { 1, 2, 3 })
t.raises("ports must be 1 to 16", ls.complex, {}, 0)
t.raises("ports must be 1 to 16", ls.complex, {}, 17)
t.raises("no integer representation", ls.complex, {}, 1.5)
t.raises("list of numbers or libstub.array expected, got libstub.complex", ls.complex, m)
t.raises("value expected", ls.complex)

t.done()
