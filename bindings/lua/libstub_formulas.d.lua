---@meta libstub
-- Published closed forms.
-- Conventions: libstub.d.lua. Nothing here runs.

---@class libstub
local libstub = {}

-- ---- formulas: published closed forms -------------------------------------------------------------------------------
--
-- Each takes its arguments in this order, or one table with these names: coax{inner_diameter = , outer_diameter = ,
-- dk = }. Lengths > 0 and up to 10 m, Dk 1 to 1000, frequencies > 0 and up to 1e15 Hz, impedances > 0 and up to 1e5 ohm,
-- all finite; else nil, message, E_ARGUMENT, or E_GEOMETRY where lengths contradict each other.

---Null n of an ideal open stub: f = n c/(4 L sqrt(Dk)), Hz.
---Source: any transmission-line text, e.g. Pozar, Microwave Engineering. Valid for a thin barrel with an ideal open
---end; Dk is the effective one of the barrel, not that of the laminate.
---@param length number m
---@param dk number effective Dk of the barrel
---@param n integer odd, >= 1
---@return number? f Hz
---@return string? message, integer? code
function libstub.quarter_wave_frequency(length, dk, n) end

---The same solved for the length.
---@param f number Hz
---@param dk number
---@param n integer odd, >= 1
---@return number? length m
---@return string? message, integer? code
function libstub.quarter_wave_length(f, dk, n) end

---The same solved for Dk. A Dk below 1 comes back as it is, with W_RANGE.
---@param f number Hz
---@param length number m
---@param n integer odd, >= 1
---@return number? dk, string? message, integer? code
function libstub.quarter_wave_dk(f, length, n) end

---Dk of a line that delays by `delay`: (c delay)^2. Below 1 with W_RANGE.
---@param delay number s/m
---@return number? dk, string? message, integer? code
function libstub.delay_dk(delay) end

---Null n of a stub with a capacitance at its open end: root n of cot(2 pi f L sqrt(Dk)/c) = 2 pi f Ce Zs.
---Source: open-end correction (Pozar).
---@param length number m
---@param dk number
---@param zs number impedance of the stub, ohm
---@param end_capacitance number F, >= 0
---@param n integer 1, 2, 3 ...
---@return number? f Hz
---@return string? message, integer? code
function libstub.loaded_stub_frequency(length, dk, zs, end_capacitance, n) end

---Depth of null n of a stub on a matched line, dielectric loss only: 20 log10(2 Zs T/(2 Zs T + Z0)),
---T = tanh(n pi tan d/4). Derived from Zin = Zs coth(gamma L).
---@param zs number ohm
---@param z0 number ohm
---@param loss_tangent number
---@param n integer odd, >= 1
---@return number? db negative
---@return string? message, integer? code
function libstub.notch_floor(zs, z0, loss_tangent, n) end

---Loss of a lossless stub below its first null: 10 log10(1 + (Z0 tan(pi f/2 f1)/(2 Zs))^2). Derived.
---@param zs number ohm
---@param z0 number ohm
---@param f_over_f1 number f over the first null
---@return number? db, string? message, integer? code
function libstub.stub_skirt(zs, z0, f_over_f1) end

---Longest stub by the rule of thumb 0.3 inch Gb/s. For comparison only.
---Source: E. Bogatin, rule of thumb 18, EDN Asia, 19 Jan 2015.
---@param bit_rate number b/s
---@return number? length m
---@return string? message, integer? code
function libstub.rule_of_thumb_length(bit_rate) end

---Coaxial line of a barrel in an antipad: C' = 2 pi eps0 Dk/ln(b/a), L' = (mu0/2 pi) ln(b/a). Textbook.
---@param inner_diameter number m
---@param outer_diameter number m, > inner_diameter
---@param dk number
---@return number? capacitance F/m
---@return number|string inductance H/m, or the message
---@return number|integer impedance ohm, or the code
function libstub.coax(inner_diameter, outer_diameter, dk) end

---Loop inductance of a barrel with `count` return vias on a circle: (mu0/2 pi)[ln(s/a) + (1/M) ln(s/(M r_g))].
---Derived; one return via is the two-wire line with s >> a. Refused where the return vias would touch.
---@param drill number m
---@param count integer 1 to 1000
---@param distance number radius of the circle, m
---@param return_drill number m
---@return number? inductance H/m
---@return string? message, integer? code
function libstub.return_inductance(drill, count, distance, return_drill) end

---Two equal barrels: odd-mode inductance of one, (mu0/2 pi) acosh(s/d), and the differential impedance without planes,
---(eta0/(pi sqrt(Dk))) acosh(s/d). Textbook (two-wire line).
---@param drill number m
---@param pitch number m, > drill
---@param dk number
---@return number? odd_inductance H/m
---@return number|string differential_impedance ohm, or the message
---@return integer? code
function libstub.twin_rod(drill, pitch, dk) end

---Capacitance between a barrel and one plane of an infinite plate pair: sum over odd modes of
---8 pi eps (1 - K0(k b)/K0(k a))/(h ln(b/a) k^2), static, uniaxial dielectric.
---Source: Zhang, Fan, Selli, Cocchini, de Paulis, IEEE T-MTT 56(9), 2008. Good to 1e-6 of that sum; twice that and the
---plane's coaxial part is 1 to 9 percent above electrostatic finite elements, for the TEM field assumed in the antipad.
---@param drill number m
---@param antipad number m, > drill
---@param spacing number between the planes, m
---@param dk_through_plane number
---@param dk_in_plane number
---@return number? capacitance F
---@return string? message, integer? code
function libstub.plate_capacitance(drill, antipad, spacing, dk_through_plane, dk_in_plane) end

---Capacitance of a whole via, handbook form, good to 50 percent: 1.41 Dk T D1/(D2 - D1) in inches and pF.
---Source: Johnson, Graham, High-Speed Digital Design, 1993, ch. 7 (from memory).
---@param thickness number m
---@param pad number m
---@param antipad number m, > pad
---@param dk number
---@return number? capacitance F
---@return string? message, integer? code
function libstub.handbook_capacitance(thickness, pad, antipad, dk) end

---Inductance of a whole via, handbook form, good to 50 percent: 5.08 h (ln(4h/d) + 1) in inches and nH.
---Source: Johnson, Graham, High-Speed Digital Design, 1993, ch. 7 (from memory).
---@param length number m
---@param diameter number m
---@return number? inductance H
---@return string? message, integer? code
function libstub.handbook_inductance(length, diameter) end

return libstub
