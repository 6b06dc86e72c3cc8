---@meta libstub
-- Networks, Touchstone files, measurements, transitions.
-- Conventions: libstub.d.lua. Nothing here runs.

---@class libstub
local libstub = {}

-- ---- networks: S-parameters -----------------------------------------------------------------------------------------
--
-- Sums on libstub.complex: matrices of 1 to 16 ports over frequency. Reference impedances in ohm, real part 1e-6 to 1e9, one
-- for all ports or a list. Waves are power waves (Kurokawa, IEEE T-MTT 13(3), 1965); with a real reference the travelling
-- ones. Frequencies fail one by one, E_ARGUMENT where there is NaN or infinity in the data, E_NONE where there is no such
-- matrix: these hold NaN, message and code follow the result, and behind them a list with the status of each; nil, message,
-- code where none came out. W_RANGE: fewer than 6 digits are left.

---S on other reference impedances.
---@param s libstub.complex
---@param z_from number|number[]|libstub.array
---@param z_to number|number[]|libstub.array
---@return libstub.complex?, string? message, integer? code, integer[]? status
function libstub.renormalise(s, z_from, z_to) end

---The same with complex reference impedances of each frequency: lists of #s times s:ports() values, of each frequency each port.
---@param s libstub.complex
---@param z_from libstub.complex
---@param z_to libstub.complex
---@return libstub.complex?, string? message, integer? code, integer[]? status
function libstub.renormalise_complex(s, z_from, z_to) end

---Z: V = Z I, ohm. Y: I = Y V, siemens. ABCD: (V1, I1) = ABCD (V2, -I2) of the left and the right half of the ports. G, H, of two
---ports: (I1, V2) = G (V1, I2) and (V1, I2) = H (I1, V2).
---@alias libstub.network_kind "S"|"Z"|"Y"|"ABCD"|"G"|"H"

---One kind of matrix from another.
---@param matrices libstub.complex
---@param from libstub.network_kind
---@param to libstub.network_kind
---@param z? number|number[]|libstub.array references of S; default 50
---@return libstub.complex?, string? message, integer? code, integer[]? status
function libstub.convert(matrices, from, to, z) end

---b behind a. The first half of the ports are the left ones, the second half the right ones; a's right ones meet b's left
---ones, in this order and on the same references.
---@param a libstub.complex
---@param b libstub.complex
---@return libstub.complex?, string? message, integer? code, integer[]? status
function libstub.cascade(a, b) end

---The other way: what is measured without what stands left and right of it.
---@param measured libstub.complex
---@param left? libstub.complex
---@param right? libstub.complex
---@return libstub.complex?, string? message, integer? code, integer[]? status
function libstub.deembed(measured, left, right) end

---A stub as two ports: zin across a line; infinite: nothing there.
---@param zin libstub.complex ohm, as model:zin gives it
---@param z_ref? number of the line, ohm; default 50
---@return libstub.complex?, string? message, integer? code, integer[]? status
function libstub.shunt(zin, z_ref) end

---Mixed modes of pairs of ports. Order of modes: the pairs' differential ones, their common ones, then the ports of no pair
---in rising order. Vd = Vp - Vn, Id = (Ip - In)/2, Vc = (Vp + Vn)/2, Ic = Ip + In. References of the modes: zp + zn and
---zp zn/(zp + zn).
---@param s libstub.complex
---@param pairs integer[][] { { positive, negative }, ... }
---@param z? number|number[]|libstub.array single-ended references, also unequal ones; default 50
---@return libstub.complex?
---@return libstub.array|string z_mixed references of the modes, or the message
---@return string|integer? message, integer? code, integer[]? status
function libstub.to_mixed(s, pairs, z) end

---And back.
---@param s libstub.complex in modes
---@param pairs integer[][] { { positive, negative }, ... }
---@param z? number|number[]|libstub.array single-ended references; default 50
---@return libstub.complex?, string? message, integer? code, integer[]? status
function libstub.to_single(s, pairs, z) end

---Largest singular value of S at each frequency: passive where <= 1.
---@param s libstub.complex
---@return libstub.array? sigma, string? message, integer? code, integer[]? status
function libstub.passivity(s) end

---Largest |Sij - Sji| at each frequency: reciprocal where 0.
---@param s libstub.complex
---@return libstub.array? difference, string? message, integer? code, integer[]? status
function libstub.reciprocity(s) end

---Ports in another order, or some of them: port i of the result is port map[i], no port twice.
---@param s libstub.complex
---@param map integer[]
---@return libstub.complex?, string? message, integer? code
function libstub.port_map(s, map) end

-- Time domain: at least 4 frequencies, 0 to 1e12 Hz, rising. Evenly spaced ones keep their step. What is missing down to 0 is
-- continued (W_RANGE where it is a 20th of the band or more; E_ARGUMENT where half). Whatever lasts longer than 1/step
-- wraps round. A NaN in the data fails the call. Time grows with the product of frequencies and times.

---Share of the energy of every impulse response that comes more than `resolution` before t0: early[to][from]. The band is
---weighted by a Kaiser window; below 1e-7 nothing can be said against the data, but an advance shorter than `resolution`,
---or beyond the band, does not show. What wraps round counts as early, and so does noise.
---@param freq number[]|libstub.array Hz
---@param s libstub.complex
---@param t0? number s, >= 0: 0, the default, or the delay that nothing can undercut
---@return libstub.array[]? early
---@return number|string resolution s, or the message
---@return string|integer? message, integer? code
function libstub.causality(freq, s, t0) end

---@class libstub.step_options
---@field rise_time number of the edge, an integrated Gaussian, 20 to 80 percent, s; W_RANGE where less than one over the last frequency
---@field to? integer port that responds; default 2, of a one-port 1
---@field from? integer port driven; default 1

---Response to a unit step at times t; 0 is the middle of the edge. W_RANGE for times beyond -1/4 to 3/4 of 1/step.
---@param freq number[]|libstub.array Hz
---@param s libstub.complex
---@param t number[]|libstub.array s
---@param options libstub.step_options
---@return libstub.array?, string? message, integer? code
function libstub.step_response(freq, s, t, options) end

---@class libstub.tdr_options
---@field rise_time number of the edge, 20 to 80 percent, s
---@field port? integer default 1
---@field z_ref? number its reference, ohm; default 50

---Impedance seen at a port against time: z_ref (1 + rho)/(1 - rho), rho the step response of its reflection; math.huge from
---1 on. Time goes there and back; reflections behind other reflections are not taken apart.
---@param freq number[]|libstub.array Hz
---@param s libstub.complex
---@param t number[]|libstub.array s
---@param options libstub.tdr_options
---@return libstub.array? impedance ohm
---@return string? message, integer? code
function libstub.tdr(freq, s, t, options) end

---@class libstub.loss_fit
---@field f_low? number Hz, included; default the first frequency
---@field f_high? number Hz, included; default the last frequency
---@field constant? boolean with a0; default without
---@field weighted? boolean a point counts by 10^(-loss/20) (IEEE 802.3, 93A.3); default all alike
---@field symbol_rate? number Bd, for the figure of merit
---@field transition_time? number s, of the transmitter, 20 to 80 percent
---@field receiver_bandwidth? number Hz, of the receiver's filter; default 0.75 of the symbol rate

---@class libstub.loss_deviation
---@field a0 number dB
---@field a1 number dB/sqrt(Hz)
---@field a2 number dB/Hz
---@field a4 number dB/Hz^2
---@field rms number of the deviation, dB
---@field greatest number largest absolute deviation, dB
---@field fom? number root of the mean of W deviation^2; absent without a symbol rate
---@field points integer frequencies within the fit

---a0 + a1 sqrt(f) + a2 f + a4 f^2 fitted to an insertion loss, and the deviation from it at each frequency (NaN outside).
---@param freq number[]|libstub.array Hz, 0 to 1e12, rising
---@param loss number[]|libstub.array dB
---@param fit? libstub.loss_fit
---@return libstub.loss_deviation?
---@return libstub.array|string deviation dB, or the message
---@return integer? code
function libstub.insertion_loss_deviation(freq, loss, fit) end

-- ---- Touchstone -----------------------------------------------------------------------------------------------------

---@class libstub.touchstone_row
---@field kind "single"|"differential"|"common"
---@field port integer from 1; differential: the positive one
---@field partner? integer from 1; absent of a single one

---What a file holds: touchstone:get gives it, libstub.touchstone_save takes it.
---@class libstub.touchstone_data
---@field freq libstub.array|number[] Hz, >= 0, rising
---@field data libstub.complex not normalised to the reference
---@field reference? libstub.array|number[]|number ohm, > 0, of each port; default 50
---@field parameter? "S"|"Z"|"Y"|"G"|"H" default S
---@field version? integer 1 or 2; default 1
---@field format? "RI"|"MA"|"DB" of the text: real and imaginary part (default), magnitude and degrees, decibels and degrees
---@field unit? "Hz"|"kHz"|"MHz"|"GHz" of the text; default Hz
---@field matrix? "full"|"lower"|"upper" of the text; default full, else version 2
---@field order? "21_12"|"12_21" of the text, of two ports; default 21_12, else version 2
---@field digits? integer for the writer: significant digits, 1 to 17; default as few as give the same number back
---@field rows? libstub.touchstone_row[] what the rows and columns of mixed-mode data are (version 2); absent: row i is port i
---@field comments? string[] lines of the head: what follows the '!'
---@field ports? integer that of data
---@field points? integer that of data
---@field noise_points? integer noise data skipped by the reader

---@class libstub.touchstone_options
---@field ports? integer 1 to 16, of a version 1 file, which does not say it; default: as a path that ends in .sNp says, else as the lines do

---@class libstub.touchstone
local touchstone = {}

---Reads a file of Touchstone 1.0, 1.1, 2.0 or 2.1 as a stream. What the standard forbids is refused, with line and column.
---@param path string
---@param options? libstub.touchstone_options
---@return libstub.touchstone?, string? message, integer? code E_READ, E_FORMAT
function libstub.touchstone_load(path, options) end

---The same from a string.
---@param text string
---@param options? libstub.touchstone_options
---@return libstub.touchstone?, string? message, integer? code E_FORMAT
function libstub.touchstone_parse(text, options) end

---The same from an open file, or from a function that returns the next piece of text, of any length, and nil at the end; it is
---given the number of bytes wanted. An error that it raises ends the reading and is raised.
---@param source file*|fun(bytes: integer): string?
---@param options? libstub.touchstone_options
---@return libstub.touchstone?, string? message, integer? code E_READ, E_FORMAT
function libstub.touchstone_read(source, options) end

---What the file holds, copied.
---@return libstub.touchstone_data
function touchstone:get() end

---Releases it. Closing twice is fine.
function touchstone:close() end

---Writes version 1.1 or 2.0 into an open file, or to a function piece by piece; false from it ends the writing (E_WRITE), an
---error that it raises is raised.
---@param data libstub.touchstone_data
---@param sink file*|fun(text: string): boolean?
---@return true?, string? message, integer? code E_ARGUMENT, E_WRITE
function libstub.touchstone_write(data, sink) end

---Writes a file, which appears whole or not at all.
---@param data libstub.touchstone_data
---@param path string
---@return true?, string? message, integer? code E_ARGUMENT, E_WRITE: what stood there before still stands
function libstub.touchstone_save(data, path) end

-- ---- measurements ---------------------------------------------------------------------------------------------------

---@class libstub.search
---@field window? number Hz the power is averaged over; default the median distance of minima of |S|, within limits
---@field f_low? number Hz, band looked at; default all there is
---@field f_high? number Hz
---@field depth_least? number dB below the trend, 1 to 100; default 3
---@field to? integer the element looked at; needed of several ports
---@field from? integer

---shallow: less than 6 dB below the trend. edge: the band ends before a flank is back half its depth. ripple: not much more
---than the ripple and noise of the band. wide: f_sigma > 0.05 f, or wider than 0.6 f. floor: noise or the window hides the
---floor, depth is a bound.
---@alias libstub.quality_flag "shallow"|"edge"|"ripple"|"wide"|"floor"

---@class libstub.measured_notch
---@field quality libstub.quality_flag[] empty: a good one
---@field f number Hz, of the stub alone, trend and window taken out
---@field f_sigma number Hz, 1 sigma from noise, ripple, curvature, window and trend
---@field depth_db number averaged |S| over the trend where that is least, dB, negative
---@field level_db number averaged |S| as it is at f_minimum, dB
---@field f_minimum number Hz, where the averaged |S| itself is least: the channel's slope in it
---@field width number Hz, between the flanks at half its depth in dB
---@field q? number as of libstub.notch, of the shape fitted; absent with floor
---@field impedance number of the open line with these flanks, over that of the channel
---@field score number its rise on both sides over what trend and stubs leave; > 4
---@field window number Hz, as used

---Stub notches in a measured S21 or Sdd21, in rising order. The shape of an open stub is fitted to what the channel's loss
---leaves. Ripple, roll-off, a noise floor and notches outside the band are none: the list may be empty. How and how
---well: docs/theory.md.
---@param freq number[]|libstub.array Hz, rising, any steps, 16 at least
---@param s libstub.complex a list, or matrices with options.to and options.from
---@param options? libstub.search
---@return libstub.measured_notch[]?
---@return libstub.array|string averaged_db NaN off the band, or the message
---@return libstub.array|integer trend_db NaN off the band, or the code
function libstub.find_notches(freq, s, options) end

---Dk of a stub from its null n, with 1-sigma errors to first order; below 1 with W_RANGE.
---@param f number Hz
---@param f_sigma number Hz, >= 0
---@param length number m
---@param length_sigma number m, >= 0
---@param n integer odd, >= 1
---@return number? dk
---@return number|string dk_sigma or the message
---@return string|integer? message, integer? code
function libstub.fit_effective_dk(f, f_sigma, length, length_sigma, n) end

---Length of a stub from its null n, with 1-sigma errors to first order.
---@param f number Hz
---@param f_sigma number Hz, >= 0
---@param dk number
---@param dk_sigma number >= 0
---@param n integer odd, >= 1
---@return number? length m
---@return number|string length_sigma m, or the message
---@return integer? code
function libstub.fit_length(f, f_sigma, dk, dk_sigma, n) end

---@class libstub.fit
---@field describes boolean false: chi2 is beyond its 99 % quantile: the model does not describe them
---@field dof integer coupons less parameters
---@field ratio number in-plane over through-plane Dk
---@field ratio_sigma number times sqrt(chi2/dof) where that is > 1
---@field ratio_low number 95 %, Student t of dof (dof 0: normal)
---@field ratio_high number
---@field offset? number m, by which all stubs are longer; the offset's members are there where it was asked for
---@field offset_sigma? number
---@field offset_low? number
---@field offset_high? number
---@field chi2 number sum of (residual/f_sigma)^2

---@class libstub.fit_options
---@field with_offset? boolean also a common offset of length; default false

---In-plane Dk ratio (0.5 to 2) of a laminate, by least squares over coupons. `predict` gives the first notch of a coupon, from
---1, in Hz; where it returns nil, message, code the fit ends so, and an error that it raises is raised.
---@param predict fun(ratio: number, offset: number, coupon: integer): number?, string?, integer?
---@param f number[]|libstub.array measured first notches, Hz
---@param f_sigma number[]|libstub.array Hz, > 0
---@param options? libstub.fit_options
---@return libstub.fit?
---@return libstub.array|string residuals measured less predicted, Hz, or the message
---@return string|integer? message, integer? code E_NONE: no minimum within the limits; E_GEOMETRY: these coupons do not tell the two apart
function libstub.fit_in_plane_dk(predict, f, f_sigma, options) end

---@class libstub.coupon_options: libstub.model_options
---@field with_offset? boolean default false

---The same with the model: the vias are the coupons. An offset makes a stub of length L a quarter wave of L + offset.
---@param stackup libstub.stackup the one the vias were made on
---@param vias libstub.via[]
---@param f number[]|libstub.array their measured first notches, Hz
---@param f_sigma number[]|libstub.array Hz, > 0
---@param options? libstub.coupon_options
---@return libstub.fit?
---@return libstub.array|string residuals Hz, or the message
---@return libstub.stackup|integer fitted the stackup with the ratio found, or the code
---@return string? message, integer? code
function libstub.fit_coupons(stackup, vias, f, f_sigma, options) end

-- ---- transition: the whole via as a network ---------------------------------------------------------------------------

---@class libstub.port
---@field layer string|integer one of those that the via connects
---@field kind? "trace"|"coax" a trace on that layer (default), or a coaxial line above the plane the barrel begins on, its mouth that plane's antipad; reference: the plane's lower face
---@field trace? libstub.trace cross-section; absent: impedance and dk say it
---@field impedance? number ohm, of the line without trace, 1 to 1000
---@field dk? number effective, of the line without trace, 1 to 1000; coax: of its filling; default 1
---@field loss_tangent? number of the line without trace, 0 to 0.5; default 0
---@field width? number m, of the trace without trace, for what happens over the antipads; default 0: the line is taken to begin at the pad
---@field distance? number m, from the axis to the reference plane; default 0: the rim of the pad
---@field z_ref? number ohm, reference impedance, 1 to 1000; default 50

---@class libstub.transition_options
---@field ports libstub.port[] no two on one layer; a layer that connects without a port carries no trace
---@field stubs? "kept"|"removed" removed: as if the barrel ended on its outermost connecting layers: what the stubs do is the difference; default kept, as drilled
---@field metal? "lossy"|"perfect" lossy, the default: barrel and planes of the stackup's conductors
---@field annuli? integer as in libstub.model_options
---@field table_up_to? number Hz, 1e9 to 200e9: S up to there is tabulated once, within 1e-9 of the model, then read in well under a microsecond

---What a transition rests on, or not. radiates: no return via, partner or edge near. launch: a trace over antipads outside 0.3 to
---0.55 mm radius, 0.15 to 0.4 mm plane distance, or unequal ones. outer: a trace on an outer layer: derived, compared with nothing.
---slot: a slot with pitch/(antipad + 0.44 h) below 0.8, or pads and drills other than 0.45 and 0.25 mm in it. unequal: two
---barrels of their own: without the flux through the openings.
---@alias libstub.remark "radiates"|"launch"|"outer"|"slot"|"unequal"

---@class libstub.transition
local transition = {}

---The cavity model of the whole barrel with the lines that enter and leave, return vias, partner and stubs. Ports: those given, in
---their order; of a pair then the partner's, which mirror them. W_RANGE with any remark but radiates. Valid to 110e9 Hz; on 21
---transitions of three-dimensional full-wave runs (docs/theory.md).
---@param via libstub.via
---@param options libstub.transition_options
---@return libstub.transition?, string? message, integer? code E_ARGUMENT, E_GEOMETRY, E_NONE, E_UNSUPPORTED
function libstub.transition(via, options) end

---Number of ports.
---@return integer
function transition:ports() end

---Reference impedance of a port, ohm.
---@param port integer from 1
---@return number? z_ref
---@return string? message, integer? code
function transition:reference(port) end

---What it rests on, or not; may be empty.
---@return libstub.remark[]
function transition:remarks() end

---A remark in plain English.
---@param remark libstub.remark
---@return string
function libstub.remark_text(remark) end

---S-parameters on the ports' references. A frequency that fails holds NaN, as in networks; W_RANGE above 110e9 and beyond the range
---of a trace.
---@param freq number|number[]|libstub.array Hz, 1e6 to 200e9
---@return libstub.complex?, string? message, integer? code, integer[]? status
function transition:s(freq) end

---@class libstub.transition_notch_options
---@field to? integer port, from 1; default 2, of one port 1
---@field from? integer port, from 1; default 1
---@field mode? "single"|"odd"|"even" of one port driven (default); of a pair, both barrels with opposite or with equal signs: `to` and `from` are ports of the first barrel then

---Minima of |S| between two ports up to f_max, as model:notches gives them; depth_db against a line without loss.
---@param f_max number Hz, up to 200e9
---@param options? libstub.transition_notch_options
---@return libstub.notch[]? notches may be empty
---@return string? message, integer? code
function transition:notches(f_max, options) end

---Releases it. Closing twice is fine.
function transition:close() end

return libstub
