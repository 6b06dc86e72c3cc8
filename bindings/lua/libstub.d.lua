---@meta libstub
-- What the module offers, for the Lua language server and for people; closed forms are in libstub_formulas.d.lua,
-- networks and transitions in libstub_network.d.lua, boards in libstub_ipc2581.d.lua. Nothing here runs.
--
-- The functions are those of libstub.h and libstub_ipc2581.h without `lstub_`, in their order; lstub_model_zin is the
-- method model:zin, lstub_stackup_create is libstub.stackup, lstub_network_cascade is libstub.cascade. What holds for all
-- of them:
--
-- Units      Metre, hertz, ohm, henry, farad, second, as in C; mil(10), mm(0.25), ghz(28) ... convert on the way in.
--            Diameters, not radii. Time factor exp(+jwt).
-- Depth      Measured downwards from the outer face of the top copper layer.
-- Numbers    Items are counted from 1. A layer is given by its name, or by its number from 1 at the top over all
--            layers of the stackup, dielectrics included; results name layers.
-- Options    Tables without surprises: an unknown key, a wrong type or a missing key raises an error that names it.
--            Tables are read raw: metamethods are not asked.
-- Failures   What a correct program can meet (a drill wider than its antipad, a file that is not there) comes back as
--            `nil, message, code`; code is one of the E_ constants. Wrong types and counts, unknown keys and closed
--            objects raise an error, as does lack of memory.
-- Warnings   A result outside the stated range of the model is followed by `message, code`, code > 0 (W_RANGE). Nothing
--            is ever printed.
-- Absent     Where C has NaN for "there is none" or "was not asked for", the member of a result is absent (nil).
--            Infinity is math.huge.
-- Objects    Frozen, and need nothing that they were made from, except that a via needs its stackup, and what belongs
--            to a board needs the board. `local m <close> = via:model()` or m:close() releases at once what the
--            collector would release later; a closed object answers "closed libstub.model".
-- Care       Results are estimates from a model. Confirm drill depths, tolerances and clearances with the fabricator;
--            verify critical links by measurement or full-wave simulation.

---@class libstub
local libstub = {}

-- ---- versions and status --------------------------------------------------------------------------------------------

---Version of the library in use, "0.1.0".
---@return string
function libstub.version() end

---ABI of the library in use. The module compares it when it is loaded, and refuses another one.
---@return integer
function libstub.abi() end

---Raised whenever numbers change.
---@return integer
function libstub.model_revision() end

---Name of a status in C: status_name(-6) is "LSTUB_E_GEOMETRY".
---@param status integer
---@return string
function libstub.status_name(status) end

---Done.
libstub.OK = 0
---Done, outside the stated range of the model.
libstub.W_RANGE = 1
---Done, more results than room. Does not reach Lua, which makes room.
libstub.W_CAPACITY = 2
---A value outside its range, NaN or infinity.
libstub.E_ARGUMENT = -1
---These three do not reach Lua: they would be a fault of the module.
libstub.E_NULL = -2
libstub.E_SIZE = -3
libstub.E_NEWER = -4
---No memory; raised as an error.
libstub.E_MEMORY = -5
---Values that are fine one by one contradict each other.
libstub.E_GEOMETRY = -6
---There is no such thing: no such layer, no stub, no notch.
libstub.E_NONE = -7
---The chosen fidelity cannot compute this feature.
libstub.E_UNSUPPORTED = -8
---Batch: items failed for different reasons.
libstub.E_MIXED = -9
---A file cannot be read.
libstub.E_READ = -10
---A file cannot be written; what stood there before still stands.
libstub.E_WRITE = -11
---A file is not what it should be; the message has the line.
libstub.E_FORMAT = -12

-- ---- units ----------------------------------------------------------------------------------------------------------

---Thousandths of an inch to metres: 25.4e-6 m.
---@param x number
---@return number metres
function libstub.mil(x) end

---Millimetres to metres.
---@param x number
---@return number metres
function libstub.mm(x) end

---Micrometres to metres.
---@param x number
---@return number metres
function libstub.um(x) end

---Inches to metres: 25.4e-3 m.
---@param x number
---@return number metres
function libstub.inch(x) end

---Gigahertz to hertz.
---@param x number
---@return number hertz
function libstub.ghz(x) end

---Gigabaud to baud.
---@param x number
---@return number baud
function libstub.gbd(x) end

-- ---- arrays ---------------------------------------------------------------------------------------------------------

---Numbers in one piece of memory (double). a[i] reads and writes items 1 to #a; beyond them a[i] is nil and writing is
---an error. Wherever a list of frequencies is wanted, a plain table will do as well.
---@class libstub.array
---@field [integer] number
---@operator len: integer
local array = {}

---The same numbers in a plain table.
---@return number[]
function array:totable() end

---Complex numbers in one piece of memory, pairs re, im: a list of them, or a list of square matrices, of S-parameters for
---instance: number (i, to, from) is what comes out of port `to` when port `from` is driven, at frequency i. #z is the length
---of the list. Without `i` the parts of all numbers come as an array, matrices row by row. Frozen.
---@class libstub.complex
---@operator len: integer
local complex = {}

---Real part of a number, or of all.
---@param i? integer 1 to #z
---@param to? integer row of a matrix, 1 to z:ports()
---@param from? integer column of a matrix
---@return number|libstub.array
function complex:re(i, to, from) end

---Imaginary part.
---@param i? integer 1 to #z
---@param to? integer row of a matrix, 1 to z:ports()
---@param from? integer column of a matrix
---@return number|libstub.array
function complex:im(i, to, from) end

---Magnitude.
---@param i? integer 1 to #z
---@param to? integer row of a matrix, 1 to z:ports()
---@param from? integer column of a matrix
---@return number|libstub.array
function complex:abs(i, to, from) end

---Angle, radians, -pi to pi.
---@param i? integer 1 to #z
---@param to? integer row of a matrix, 1 to z:ports()
---@param from? integer column of a matrix
---@return number|libstub.array
function complex:arg(i, to, from) end

---20 log10 of the magnitude, dB.
---@param i? integer 1 to #z
---@param to? integer row of a matrix, 1 to z:ports()
---@param from? integer column of a matrix
---@return number|libstub.array
function complex:db(i, to, from) end

---Both parts of a number.
---@param i integer 1 to #z
---@param to? integer row of a matrix, 1 to z:ports()
---@param from? integer column of a matrix
---@return number re, number im
function complex:get(i, to, from) end

---One element of all matrices, a list: s:element(2, 1):db() is the transmission in dB.
---@param to integer row, 1 to z:ports()
---@param from integer column
---@return libstub.complex
function complex:element(to, from) end

---Rows and columns of each matrix; 1 of a plain list, which is that of one-ports.
---@return integer
function complex:ports() end

---re, im, re, im ... of all numbers in an array.
---@return libstub.array
function complex:interleaved() end

---An array of the numbers in a table or array, or of `n` zeros.
---@param from integer|number[]|libstub.array
---@return libstub.array
function libstub.array(from) end

---Complex numbers from re, im, re, im ...: a list, or matrices of that many ports, row by row.
---@param numbers number[]|libstub.array
---@param ports? integer 1 to 16; default 1
---@return libstub.complex
function libstub.complex(numbers, ports) end

---`count` numbers from first to last, both included, equally far apart.
---@param first number
---@param last number
---@param count integer >= 1
---@return libstub.array
function libstub.linspace(first, last, count) end

-- ---- material -------------------------------------------------------------------------------------------------------

---@class libstub.dielectric
---@field dk number through-plane (data sheet) Dk at f_ref, 1 to 1000
---@field in_plane_ratio? number in-plane Dk over through-plane Dk, 0.5 to 2; default 1
---@field loss_tangent? number at f_ref, 0 to 0.5; default 0
---@field f_ref? number Hz, 1e5 to 1e11; default 1e9

---Complex relative permittivity over frequency, causal (im <= 0), through the point given, between 1 kHz and 1 THz.
---Source: Djordjevic, Biljic, Likar-Smiljanic, Sarkar, IEEE T-EMC 43(4), 2001.
---For one frequency: through_re, through_im, in_plane_re, in_plane_im as four numbers. W_RANGE where a large loss tangent
---drives the real part below 1.
---@param dielectric libstub.dielectric
---@param freq number|number[]|libstub.array Hz, 1e3 to 1e12
---@return libstub.complex? through_plane, libstub.complex|string in_plane or the message
---@return integer? code
function libstub.dielectric_permittivity(dielectric, freq) end

---@class libstub.conductor
---@field conductivity? number S/m, 1e5 to 1e8; default 5.8e7
---@field roughness? number rms height, m, 0 to 20e-6; default 0, smooth
---@field roughness_law? "hammerstad"|"spheres" default hammerstad: 1 + (2/pi) atan(1.4 (rms/skin depth)^2) times the loss, at most 2; spheres: fourteen stacked on a smooth surface, at most 8.3 times

---Skin depth sqrt(1/(pi f mu0 conductivity)). Textbook.
---@param conductivity number S/m, 1e5 to 1e8
---@param f number Hz, 1e3 to 1e12
---@return number? depth m
---@return string? message, integer? code
function libstub.skin_depth(conductivity, f) end

---Impedance of the surface of thick copper, ohm per square: (1 + j)/(conductivity depth) K, K complex and causal, of the
---roughness. For one frequency: re, im.
---Source: Hammerstad, Jensen, MTT-S 1980; Huray et al., DesignCon 2010, for the stack of Simonovich, 2015: with a measured
---Rz, roughness = Rz/3.4641.
---@param conductor libstub.conductor
---@param freq number|number[]|libstub.array Hz, 1e3 to 1e12
---@return libstub.complex? z, string? message, integer? code
function libstub.conductor_surface_impedance(conductor, freq) end

---@class libstub.trace
---@field kind "microstrip"|"stripline" one plane, below; or a plane below and a plane above
---@field width number m, 1e-6 to 0.01
---@field height_below number from its lower face to the plane, m, 1e-6 to 0.01
---@field dielectric_below libstub.dielectric
---@field thickness? number of its copper, m, 0 to 1e-3; default 0: a sheet, and no conductor loss
---@field height_above? number stripline: from its upper face to the plane, m, 1e-6 to 0.01; microstrip: none
---@field dielectric_above? libstub.dielectric default as below; of a microstrip: air. Its Dk is no greater than that below
---@field conductor? libstub.conductor of trace and planes; default smooth copper
---@field no_dispersion? boolean a microstrip as at low frequency, strictly causal; default false

---Characteristic impedance (ohm) and propagation constant (1/m) of a trace, lossy and dispersive: Z = sqrt(Z'/Y'), gamma =
---sqrt(Z' Y'). For one frequency: z_re, z_im, gamma_re, gamma_im as four numbers. W_RANGE outside the ranges of the sources.
---Source: Hammerstad, Jensen 1980; Kirschning, Jansen 1982 and 1983; Cohn 1954; Wheeler 1942 and 1978; how far each is good is
---in the header and in docs/theory.md.
---@param trace libstub.trace
---@param freq number|number[]|libstub.array Hz, 1e3 to 1e12
---@return libstub.complex? z, libstub.complex|string gamma or the message
---@return string|integer? message, integer? code
function libstub.trace_line(trace, freq) end

-- ---- stackup --------------------------------------------------------------------------------------------------------

---@class libstub.layer
---@field name string 1 to 127 bytes, no other layer has it
---@field kind "dielectric"|"signal"|"plane"|"mixed" signal: no plane around a barrel; mixed: traces and plane areas
---@field thickness number m, > 0, at most 0.1; of copper also 0: a sheet
---@field tol_plus? number m, at most the thickness; default 0
---@field tol_minus? number m, less than the thickness; default 0
---@field dk? number needed by a dielectric; of a copper layer: the resin between its copper, default that above it
---@field in_plane_ratio? number as in libstub.dielectric
---@field loss_tangent? number as in libstub.dielectric
---@field f_ref? number as in libstub.dielectric
---@field conductivity? number copper layers only, S/m, 1e5 to 1e8; default 5.8e7
---@field roughness? number copper layers only, as in libstub.conductor
---@field roughness_law? "hammerstad"|"spheres" copper layers only, as in libstub.conductor

---@class libstub.stackup
---@operator len: integer
local stackup = {}

---A stackup from its layers, top first.
---@param layers libstub.layer[]
---@return libstub.stackup?, string? message, integer? code E_ARGUMENT, E_GEOMETRY
function libstub.stackup(layers) end

---Number of layers, dielectrics included; also #stackup.
---@return integer
function stackup:count() end

---Number of copper layers.
---@return integer
function stackup:copper_count() end

---A layer as stored, defaults filled in; libstub.stackup takes such a table again.
---@param layer string|integer
---@return libstub.layer?, string? message, integer? code E_NONE
function stackup:layer(layer) end

---All of them.
---@return libstub.layer[]
function stackup:layers() end

---Number of the layer with that name.
---@param name string
---@return integer? number from 1
---@return string? message, integer? code E_NONE
function stackup:find(name) end

---Number, among all layers, of copper layer `number`, counted from 1 at the top.
---@param number integer
---@return integer? layer from 1
---@return string? message, integer? code E_NONE
function stackup:copper(number) end

---Depths of the two faces of a layer.
---@param layer string|integer
---@return number? top m
---@return number|string bottom m, or the message
---@return integer? code E_NONE
function stackup:depth(layer) end

---@class libstub.interval
---@field thickness number m
---@field tol_plus number m, worst case
---@field tol_minus number m, worst case
---@field tol_rss_plus number m, root of the sum of squares
---@field tol_rss_minus number m, root of the sum of squares
---@field dk_through_plane number layers in series
---@field dk_in_plane number layers side by side
---@field loss_tangent number of the in-plane mean

---What lies between two depths, both within the stackup.
---@param top number m
---@param bottom number m, > top
---@return libstub.interval?, string? message, integer? code E_ARGUMENT, E_GEOMETRY
function stackup:interval(top, bottom) end

---The same stackup with that in-plane ratio in all its dielectrics, resin between copper included.
---@param ratio number in-plane Dk over through-plane Dk, 0.5 to 2
---@return libstub.stackup?, string? message, integer? code
function stackup:with_in_plane_ratio(ratio) end

---Releases it. Closing twice is fine.
function stackup:close() end

-- ---- via ------------------------------------------------------------------------------------------------------------

---@class libstub.returns
---@field count? integer return vias on a circle, 1 to 1000
---@field distance? number radius of that circle, m
---@field drill? number of the return vias, m; default that of the via
---@field xy? number[][] instead of count and distance: { { x, y }, ... } of each about the axis of the via, m
---@field spans? (string|integer)[][] with xy: { { first, last }, ... }, copper layers that each joins; default all
---@field wall? number instead of all these: radius of a closed wall, m

---@class libstub.pair
---@field pitch number axis to axis, m, > drill
---@field shared? boolean one antipad around both barrels; default false: an antipad each
---@field backdrills? libstub.backdrill[] of the partner, {} for none; default: it is drilled as the barrel is

---Straight edges of all planes, distances from the axis, m, > 0. The partner of a pair is at (pitch, 0).
---@class libstub.edges
---@field left number towards -x
---@field right number towards +x
---@field front number towards -y
---@field back number towards +y
---@field shorted? boolean the planes are joined to each other all along; default false: bare

---@class libstub.backdrill
---@field side "top"|"bottom"
---@field depth number m, from that side's outer copper face to the tip
---@field diameter number m, of the bit, at least the drill

---@class libstub.pin
---@field side "top"|"bottom" the pin enters from
---@field length number least barrel to keep from that surface, m

---@class libstub.via_options
---@field drill number barrel diameter, m, > 0, <= 0.01
---@field connects (string|integer)[] copper layers where the signal enters or leaves, one or more, none twice
---@field start_layer? string|integer the barrel runs from; default the first copper layer
---@field end_layer? string|integer the barrel runs to; default the last copper layer
---@field pad? number pad_start, pad_inner and pad_end in one; default 0, none
---@field pad_start? number m, >= drill; 0: none
---@field pad_inner? number m, on the inner layers that connect, and on all if pads are kept; 0: none
---@field pad_end? number m; 0: none
---@field antipad? number m, on every plane crossed that does not connect; 0: mixed layers are no plane here, and planes need an entry in antipads
---@field pads? table<string|integer, number> diameters that replace those above, by layer; 0: no pad
---@field antipads? table<string|integer, number> the same for antipads; 0: no plane at the via on this layer; on a plane that connects: the opening that the signal comes through
---@field clear? table<string|integer, number> diameter free of other copper around the axis, by layer, where known
---@field nonfunctional_pads? "removed"|"kept" on inner layers that do not connect; default removed
---@field returns? libstub.returns default none near: the plate pairs carry the return, and radiate
---@field pair? libstub.pair partner barrel
---@field backdrills? libstub.backdrill[] at most one a side
---@field pin? libstub.pin press-fit pin
---@field outside_dk? number of what lies beyond the outer copper, 1 to 1000; default 1, air
---@field lid_distance? number m, from the outer copper to a conducting lid; default 0: open space
---@field hole_dk? number of what fills a drilled hole, 1 to 1000; default 1, air
---@field edges? libstub.edges default planes without end

---@class libstub.via
local via = {}

---A via on a stackup, checked. It keeps the stackup.
---@param stackup libstub.stackup
---@param options libstub.via_options
---@return libstub.via?, string? message, integer? code E_ARGUMENT, E_GEOMETRY, E_NONE
function libstub.via(stackup, options) end

---True, or what is wrong with it. Only a via from a board can be wrong.
---@return true?, string? message, integer? code
function via:check() end

---@class libstub.stub
---@field side "top"|"bottom" the side it lies on
---@field exit_layer string connecting layer it hangs on
---@field end_layer? string outer layer its barrel ends on; absent where it was drilled
---@field top number depth of its upper end, m
---@field bottom number depth of its lower end, m
---@field length number nominal, m
---@field length_min number worst case over the stackup's tolerances, m
---@field length_max number worst case, m
---@field length_rss_min number root of the sum of squares, m
---@field length_rss_max number root of the sum of squares, m

---The stub pieces, top one first: none, one or two.
---@return libstub.stub[]?, string? message, integer? code
function via:stubs() end

---bulk: quarter wave in the laminate's through-plane Dk. loaded: uniform line, capacitances of planes and pads in it.
---ladder, for sweeps: every cavity a line section with the radial wave of its plates. cavity: radial modes of every plate
---pair and copper layer, matched at every opening.
---@alias libstub.fidelity "default"|"bulk"|"loaded"|"ladder"|"cavity"

---@class libstub.model_options
---@field fidelity? libstub.fidelity default: the most accurate one of this version, cavity
---@field z_ref? number ohm, line that the stubs load; of a pair: of one of the two; default 50
---@field annuli? integer cavity: annuli an opening is cut into at least, 2 to 12; default 4

---Compiles the geometry: once, then many questions. A via without any stub compiles, and loads nothing.
---@param options? libstub.model_options
---@return libstub.model?, string? message, integer? code E_ARGUMENT, E_GEOMETRY, E_UNSUPPORTED
function via:model(options) end

---The stackup it was made on.
---@return libstub.stackup
function via:stackup() end

---A new table that makes this via again: change it, and make another.
---@return libstub.via_options
function via:options() end

---Releases it. Closing twice is fine.
function via:close() end

-- ---- model ----------------------------------------------------------------------------------------------------------

---@class libstub.stub_option
---@field stub? integer|"all" number of the stub, from 1; default "all": all in parallel, the path between them neglected

---@class libstub.model
local model = {}

---0, 1 or 2.
---@return integer
function model:stub_count() end

---The stub with that number.
---@param number integer from 1
---@return libstub.stub?, string? message, integer? code E_NONE
function model:stub(number) end

---@class libstub.line
---@field fidelity libstub.fidelity the one that made these numbers
---@field dk_effective number (c/(4 L f1))^2 of the first notch: end effects included
---@field dk_line number c^2 L' C' of the line without its end
---@field impedance number ohm
---@field inductance number H/m
---@field capacitance number F/m
---@field end_capacitance number F
---@field stated_error number of the first notch, relative: the largest found against full-wave data for this fidelity; cavity: as error of libstub.notch
---@field f_range number Hz, top of the stated range. bulk, loaded: an antipad radius or plate spacing is a tenth of the wavelength; else 110e9

---A stub as a line, at 1 GHz. ladder and cavity, which are no lines: as the uniform line of the same first notch that
---holds the same charge.
---@param number integer from 1
---@return libstub.line?, string? message, integer? code E_NONE
function model:line(number) end

---Input impedance of a stub where it hangs on the signal path, ohm; bulk, loaded: Zin = Zs coth(gamma L) with the end
---load (Pozar). For one frequency: re, im. W_RANGE above f_range of the line, then with a list of statuses, one per frequency.
---@param freq number|number[]|libstub.array Hz, 1e6 to 1e12; ladder and cavity: to 200e9
---@param options? libstub.stub_option
---@return libstub.complex? zin, string? message, integer? code E_ARGUMENT, E_NONE without a stub
---@return integer[]? status
function model:zin(freq, options) end

---Transmission past the stub on a line of z_ref matched at both ends: 2 Zin/(2 Zin + z_ref). For one frequency: re, im.
---@param freq number|number[]|libstub.array Hz, 1e6 to 1e12; ladder and cavity: to 200e9
---@param options? libstub.stub_option
---@return libstub.complex? s21, string? message, integer? code, integer[]? status
function model:s21(freq, options) end

---Loss that the stubs add, dB, 0 to 300: -20 log10 |S21|. For one frequency: a number.
---@param freq number|number[]|libstub.array Hz, 1e6 to 1e12; ladder and cavity: to 200e9
---@param options? libstub.stub_option
---@return libstub.array? loss dB
---@return string? message, integer? code, integer[]? status
function model:added_loss(freq, options) end

---@class libstub.notch
---@field stub? integer number of the stub that makes it, from 1; absent of a transition
---@field f number Hz, minimum of |S21|: the notch as it is measured
---@field f_series? number Hz, zero of Im Zin next to it; of a transition: where the phase of S turns back fastest
---@field depth_db number 20 log10 |S21| at f, negative, -300 at least
---@field q? number f over the width of the notch 3 dB above its floor; absent where it is not that deep
---@field error? number of f, relative; absent of a transition: cavity estimates it for each notch from a second model of fewer annuli; others: stated_error of the line

---All notches from 1 MHz up to f_max, in rising order: minima of |S21| found by bracketing. ladder and
---cavity find none above 200e9.
---@param f_max number Hz, up to 1e12
---@param options? libstub.stub_option
---@return libstub.notch[]? notches may be empty
---@return string? message, integer? code
function model:notches(f_max, options) end

---Margins of the via for a signal.
---@param signal libstub.signal
---@param criteria libstub.criteria
---@return libstub.margin?, string? message, integer? code
function model:margin(signal, criteria) end

---Highest symbol rate at which the via still meets the criteria; math.huge if nothing limits up to 1e12 Bd.
---@param criteria libstub.criteria
---@return number? symbol_rate Bd
---@return "none"|"notch"|"loss"|string limited_by or the message
---@return integer? code
function model:highest_symbol_rate(criteria) end

---Releases it. Closing twice is fine.
function model:close() end

---@class libstub.first_notches
---@field f1 libstub.array Hz, lowest over the via's stubs; NaN where it has none that the fidelity looks for
---@field dk_effective libstub.array of that stub
---@field length libstub.array of that stub, m
---@field status integer[]

---First notch of many vias on one stackup. An item that fails holds NaN and its status, and does not stop the others:
---then message and code follow the result. nil only where nothing could be tried.
---@param stackup libstub.stackup the one the vias were made on
---@param vias libstub.via[]
---@param options? libstub.model_options
---@return libstub.first_notches?, string? message, integer? code
function libstub.first_notch_batch(stackup, vias, options) end

-- ---- criteria -------------------------------------------------------------------------------------------------------

---@class libstub.signal
---@field symbol_rate number Bd, 1e6 to 1e12
---@field levels? integer 2 to 64; default 2, NRZ; 4 is PAM4

---@class libstub.criteria
---@field notch_over_nyquist? number first notch at least this many times Nyquist, > 0
---@field added_loss_db? number loss added at Nyquist at most this, dB, > 0; at least one of the two is needed

---@class libstub.margin
---@field pass boolean every criterion asked for is met
---@field limited_by "none"|"notch"|"loss" the criterion with the least margin
---@field nyquist number Hz
---@field f1 number first notch, Hz; math.huge without a stub or a notch where the fidelity looks for one
---@field notch_over_nyquist number f1/nyquist
---@field notch_margin? number f1 - limit, Hz; absent if not asked
---@field added_loss_db number at Nyquist
---@field loss_margin_db? number limit - loss; absent if not asked
---@field stub_length number longest stub, m
---@field rule_length number 0.3 inch Gb/s over the bit rate, m: for comparison only
---@field rule_margin number rule_length - stub_length, m
---@field status? integer in a batch

---@class libstub.stub_limit
---@field limited_by "none"|"notch"|"loss" none: even the whole barrel passes
---@field length number longest stub that passes, m; the whole stub if nothing limits; 0 if none does
---@field stub_length number of the via as it is, m
---@field margin number length - stub_length, m; where nothing limits: 0, a lower bound
---@field status? integer in a batch

---Half the symbol rate, Hz.
---@param signal libstub.signal
---@return number? nyquist Hz
---@return string? message, integer? code
function libstub.signal_nyquist(signal) end

---Symbol rate times the bits in a symbol, b/s.
---@param signal libstub.signal
---@return number? bit_rate b/s
---@return string? message, integer? code
function libstub.signal_bit_rate(signal) end

---@class libstub.longest_options: libstub.model_options
---@field side? "top"|"bottom" default that of the only stub; needed where the via has two

---Longest tolerable stub: the barrel on `side`, drilled back as little as the criteria allow, the other side as it is.
---Found by bracketing on drilled geometries, to 1 nm (ladder, cavity: 0.1 um). The criteria are taken
---to get no better as the stub grows.
---@param via libstub.via
---@param signal libstub.signal
---@param criteria libstub.criteria
---@param options? libstub.longest_options
---@return libstub.stub_limit?, string? message, integer? code E_NONE: no stub there
function libstub.longest_stub(via, signal, criteria, options) end

---The same for many vias. sides, signals, criteria: one for all, or a list as long as the vias. An item that fails is
---{ status = code }; then message and code follow the list.
---@param stackup libstub.stackup the one the vias were made on
---@param vias libstub.via[]
---@param sides "top"|"bottom"|("top"|"bottom")[]
---@param signals libstub.signal|libstub.signal[]
---@param criteria libstub.criteria|libstub.criteria[]
---@param options? libstub.model_options
---@return libstub.stub_limit[]?, string? message, integer? code
function libstub.longest_stub_batch(stackup, vias, sides, signals, criteria, options) end

---Margins of many vias, one model each, compiled within; lists and failures as in longest_stub_batch.
---@param stackup libstub.stackup the one the vias were made on
---@param vias libstub.via[]
---@param signals libstub.signal|libstub.signal[]
---@param criteria libstub.criteria|libstub.criteria[]
---@param options? libstub.model_options
---@return libstub.margin[]?, string? message, integer? code
function libstub.margin_batch(stackup, vias, signals, criteria, options) end

-- ---- plan -----------------------------------------------------------------------------------------------------------

---@class libstub.capability
---@field sides? "top"|"bottom"|"both" that may be drilled; default both
---@field tolerance_method? "worst"|"rss" drill and stackup tolerances added, or root of the sum of squares; default worst
---@field depth_tolerance? number drilled depth, plus or minus, m; default 0, as for all below
---@field cut_clearance? number least distance from the tip to the must-not-cut layer, m, with the tolerances used up
---@field residual_min? number least residual stub, nominal, m
---@field residual_target? number residual stub aimed at where there is room, nominal, m
---@field bit_oversize? number bit diameter less drill diameter, m
---@field wall_clearance? number least distance from the wall of the drilled hole to copper, m
---@field aspect_ratio? number greatest drilled depth over bit diameter; 0: no limit
---@field depths? number[]|libstub.array the only depths that may be drilled, m; default any

---@class libstub.job
---@field via libstub.via
---@field signal? libstub.signal absent: carries no signal that matters; not judged
---@field criteria? libstub.criteria needed with a signal

---@class libstub.plan
---@operator len: integer
local plan = {}

---Plans a board. A via that meets its criteria is kept; otherwise the one drill that makes it pass is taken, the
---shorter cut first, then both; per side the fewest depths that serve all vias are found. Vias in error do not stop it:
---they come out as "refused".
---@param stackup libstub.stackup the one the vias were made on
---@param jobs libstub.job[]
---@param capability libstub.capability
---@param options? libstub.model_options
---@return libstub.plan?, string? message, integer? code
function libstub.plan(stackup, jobs, capability, options) end

---Number of jobs; also #plan.
---@return integer
function plan:count() end

---@class libstub.drill_cut
---@field drilled boolean a back-drill is planned on this side; the members below are there only then
---@field limit? number longest stub that the criteria allow here, m
---@field must_not_cut? string layer
---@field group? integer row of the drill table, from 1
---@field depth? number target, from that side's outer copper face, m
---@field depth_least? number any target between these two would do, m
---@field depth_most? number m
---@field diameter? number of the bit, m
---@field residual? number stub left, nominal, m
---@field residual_least? number with the tolerances, m
---@field residual_most? number with the tolerances, m

---@alias libstub.action
---| "not_judged" no signal
---| "keep"
---| "drill_top"
---| "drill_bottom"
---| "drill_both"
---| "cannot" fails, and cannot be drilled so that it passes
---| "refused" the via itself is in error: see `status`

---@alias libstub.reason
---| "no_signal"
---| "no_stub"
---| "passes" the stub is there, and within the criteria
---| "fails" it does not pass as it is, and is drilled
---| "limit_too_short" no residual the fabricator can hold is short enough
---| "no_room" the barrel is too short to be drilled with these tolerances
---| "side" that side may not be drilled
---| "wall" the bit comes too near to copper on reason_layer
---| "aspect" too deep for the bit
---| "depths" none of the allowed depths fits
---| "pin" the pin needs the barrel
---| "buried" the barrel does not reach the surface on that side
---| "drilled" that side has been drilled already
---| "error" the via is in error
---| "one_layer" connects on one layer only: no path, nothing to judge

---@class libstub.decision
---@field action libstub.action
---@field reason libstub.reason
---@field reason_side? "top"|"bottom"|"both" side the reason speaks of
---@field reason_layer? string layer the reason speaks of
---@field reason_value? number the two numbers compared, in the reason's unit
---@field reason_limit? number
---@field status integer of the model: W_RANGE ...; < 0 with "refused"
---@field stub_count integer
---@field stub_top number nominal length before, m; 0: none
---@field stub_bottom number
---@field top libstub.drill_cut
---@field bottom libstub.drill_cut
---@field before? libstub.margin as it is; absent where nothing was judged
---@field after? libstub.margin as planned, with the longest residual

---What is done with via i.
---@param i integer 1 to #plan
---@return libstub.decision?, string? message, integer? code E_NONE
function plan:decision(i) end

---One line of plain English that says why, the same in every language: of a refused via it is the library's message,
---in which layers are counted from 0.
---@param i integer 1 to #plan
---@return string? text, string? message, integer? code E_NONE
function plan:reason(i) end

---Rows of the drill table.
---@return integer
function plan:group_count() end

---@class libstub.drill_group
---@field side "top"|"bottom"
---@field from_layer string outer copper layer the drill enters through
---@field must_not_cut string layer
---@field hits integer
---@field diameter number bit, m
---@field depth number target, m
---@field tolerance number plus or minus, m
---@field residual_most number longest stub left by this row, with the tolerances, m

---Row i of the drill table.
---@param i integer from 1
---@return libstub.drill_group?, string? message, integer? code E_NONE
function plan:group(i) end

---All rows.
---@return libstub.drill_group[]
function plan:groups() end

---@class libstub.totals
---@field vias integer jobs
---@field not_judged integer
---@field keep integer
---@field drill_top integer
---@field drill_bottom integer
---@field drill_both integer
---@field cannot integer
---@field refused integer
---@field outside_range integer decided by a model outside its stated range
---@field depths_top integer different drill depths: proved fewest for the vias drilled
---@field depths_bottom integer
---@field groups integer
---@field geometries integer different (via, signal, criteria) among the jobs: each computed once
---@field worst_notch_over_nyquist number least over the judged vias after the plan; math.huge: none
---@field worst_added_loss_db number greatest over the judged vias after the plan

---The plan in numbers.
---@return libstub.totals
function plan:totals() end

---Releases it. Closing twice is fine.
function plan:close() end

---Plain words for an action: action_name("drill_bottom").
---@param action libstub.action
---@return string
function libstub.action_name(action) end

---Plain words for a reason.
---@param reason libstub.reason
---@return string
function libstub.reason_name(reason) end

return libstub
