/*
** libstub -- via-stub analysis for multilayer boards, in process, in SI units.
**
** On a multilayer board a fast signal changes layers through a plated barrel. Whatever is left of the
** barrel beyond the layers where the signal enters and leaves is an open stub. This library says how
** long the stubs of a via are, where they notch the channel, what they cost at a given symbol rate,
** whether to drill them back, from which side and how deep, and does so for one via or a whole board.
**
** The tour, left to right; every part includes only what stands left of it:
**
**     status -> formulas -> material -> stackup -> via -> model -> criteria -> plan
**
** Eight calls make a first program:
**
**     lstub_layer layers[3];                    fill after LSTUB_INIT(layers[i])
**     lstub_stackup_create(layers, 3, sizeof layers[0], NULL, &board, &err);
**     LSTUB_INIT(via); via.drill = 0.25e-3; via.antipad = 0.75e-3; via.connects = ...
**     lstub_model_create(board, &via, NULL, NULL, &model, &err);
**     lstub_model_notches(model, LSTUB_ALL_STUBS, 67e9, notches, 8, sizeof notches[0], &count, &err);
**     lstub_model_margin(model, &signal, &criteria, &margin, &err);
**     lstub_model_destroy(model);
**     lstub_stackup_destroy(board);
**
** Units      Metre, hertz, ohm, henry, farad, siemens, second. Dk is relative. Diameters, not radii,
**            for drills, pads and antipads. Time factor exp(+jwt), permittivity e' (1 - j tan d).
**            A complex array is double[2 n]: re, im, re, im ... (C99 double complex, NumPy complex128).
** Depth      Measured downwards; 0 is the outer face of the top copper layer. Solder mask above it has
**            negative depth.
** Layers     Counted from 0 at the top over all layers of the stackup, dielectrics included.
** Structs    Inputs and outputs start with `size`; LSTUB_INIT(x) zeroes x and sets it. A longer struct of
**            a newer program is accepted when the part this library does not know is zero, and refused
**            otherwise; a shorter one of an older program reads as zero beyond its end. Each member says
**            what 0 means. Names and arrays that a struct points to are copied where they are kept.
**            Arrays of structs carry a stride in bytes. `reserved` members must be 0.
** Handles    Immutable once made, need nothing that they were made from, and may be used by any number
**            of threads at once. The caller allocates everything else.
** Status     0 done; > 0 done, but outside the stated range of the model; < 0 nothing was produced and
**            outputs are untouched, but for batch outputs, which hold NaN (doubles) and the item's status.
** Errors     A message in a struct of the caller's names the argument, its value, unit and range, and
**            the index of the item. NULL is allowed wherever a message is wanted.
** Threads    No globals, no lazy tables, no locale, no printing, no threads of its own.
** Care       Results are estimates from a model. Confirm drill depths, tolerances and clearances with
**            the fabricator; verify critical links by measurement or full-wave simulation;
**            safety-related equipment follows its own codes and licensed practice.
*/
#ifndef LIBSTUB_H
#define LIBSTUB_H

#include <stddef.h>
#include <stdint.h>

#ifdef __cplusplus
extern "C" {
#endif

#if defined(_WIN32) && defined(LSTUB_BUILD_SHARED)
#define LSTUB_API __declspec(dllexport)
#elif defined(__GNUC__)
#define LSTUB_API __attribute__((visibility("default")))
#else
#define LSTUB_API
#endif

/* ---- versions ----------------------------------------------------------------------------------- */
#define LSTUB_VERSION "0.1.0"
#define LSTUB_ABI     0          /* raised when an old program could no longer run with the library   */
LSTUB_API const char *lstub_version(void);        /* of the library in use, "0.1.0"                   */
LSTUB_API int32_t     lstub_abi(void);            /* LSTUB_ABI of the library in use: compare at load */
LSTUB_API int32_t     lstub_model_revision(void); /* raised whenever numbers change                   */

/* ---- status, messages, memory ------------------------------------------------------------------- */
#define LSTUB_OK             0
#define LSTUB_W_RANGE        1   /* done, outside the stated range of the model                       */
#define LSTUB_W_CAPACITY     2   /* done, but there were more results than the array holds            */
#define LSTUB_E_ARGUMENT   (-1)  /* a value outside its range, NaN or infinity                        */
#define LSTUB_E_NULL       (-2)  /* a pointer that must not be null                                   */
#define LSTUB_E_SIZE       (-3)  /* `size` or a stride is not that of a struct, or reserved is not 0  */
#define LSTUB_E_NEWER      (-4)  /* a member this library does not know is not zero                   */
#define LSTUB_E_MEMORY     (-5)  /* the allocator returned null                                       */
#define LSTUB_E_GEOMETRY   (-6)  /* values that are fine one by one contradict each other             */
#define LSTUB_E_NONE       (-7)  /* there is no such thing: no such layer, no stub, no notch          */
#define LSTUB_E_UNSUPPORTED (-8) /* the chosen fidelity cannot compute this feature                   */
#define LSTUB_E_MIXED      (-9)  /* batch: items failed for different reasons                         */
#define LSTUB_E_READ      (-10)  /* a file cannot be read                                             */
#define LSTUB_E_WRITE     (-11)  /* a file cannot be written; what stood there before still stands    */
#define LSTUB_E_FORMAT    (-12)  /* a file is not what it should be; the message has the line         */
LSTUB_API const char *lstub_status_name(int32_t status);   /* "LSTUB_E_ARGUMENT"; never null          */

typedef struct lstub_error {     /* the caller's; filled on every status but LSTUB_OK                 */
    size_t  size;
    int32_t status;
    int32_t reserved;
    int64_t index;               /* of the item that failed, or of the line of a file; -1: no item    */
    char    field[64];           /* the argument or member: "drill"                                   */
    char    message[256];        /* "layer 7 'L5': thickness = -0.0001 m: must be > 0"                */
} lstub_error;

/* Memory for handles. `allocate` returns null when there is none left and must align like malloc;
** `release` takes null. A null allocator means malloc and free. Copied into the handle. */
typedef struct lstub_allocator {
    size_t size;
    void *(*allocate)(void *user, size_t bytes);
    void  (*release)(void *user, void *memory);
    void  *user;
} lstub_allocator;

/* Zero a struct and set its size. The only initialiser: everything in the structs below starts at 0. */
LSTUB_API void lstub_init(void *data, size_t size);
#define LSTUB_INIT(x) lstub_init(&(x), sizeof(x))

/* ---- formulas: published closed forms, one line each ---------------------------------------------
**
** For checks, teaching and first estimates. Each writes one or a few doubles and returns LSTUB_OK,
** LSTUB_E_ARGUMENT, LSTUB_E_NULL, or LSTUB_E_GEOMETRY where lengths contradict each other. Lengths > 0 and up
** to 10 m, Dk 1 to 1000, frequencies > 0 and up to 1e15 Hz, impedances > 0 and up to 1e5 ohm, all finite. */

/* Null n (1, 3, 5 ... odd, >= 1) of an ideal open stub: f = n c / (4 L sqrt(Dk)), in Hz.
** Source: any transmission-line text, e.g. Pozar, Microwave Engineering. Valid for a thin barrel with an
** ideal open end; Dk is the effective one of the barrel, not that of the laminate. */
LSTUB_API int32_t lstub_quarter_wave_frequency(double length, double dk, int32_t n, double *f, lstub_error *err);
/* The same solved for the length, in m, and for Dk. Dk below 1 comes back as it is, with LSTUB_W_RANGE. */
LSTUB_API int32_t lstub_quarter_wave_length(double f, double dk, int32_t n, double *length, lstub_error *err);
LSTUB_API int32_t lstub_quarter_wave_dk(double f, double length, int32_t n, double *dk, lstub_error *err);
/* Dk of a line that delays by `delay` seconds per metre: (c delay)^2. */
LSTUB_API int32_t lstub_delay_dk(double delay, double *dk, lstub_error *err);
/* Nulls with a capacitance at the open end: the root number n = 1, 2, 3 ... of
** cot(2 pi f L sqrt(Dk)/c) = 2 pi f Ce Zs. end_capacitance >= 0. Source: open-end correction (Pozar). */
LSTUB_API int32_t lstub_loaded_stub_frequency(double length, double dk, double zs, double end_capacitance,
                                              int32_t n, double *f, lstub_error *err);
/* Depth of null n (odd) of a stub on a matched line z0, dielectric loss only, in dB (negative):
** 20 log10(2 Zs T/(2 Zs T + Z0)), T = tanh(n pi tan d/4). Derived from Zin = Zs coth(gamma L). */
LSTUB_API int32_t lstub_notch_floor(double zs, double z0, double loss_tangent, int32_t n, double *db, lstub_error *err);
/* Loss of a lossless stub below its first null f1, in dB: 10 log10(1 + (Z0 tan(pi f/2 f1)/(2 Zs))^2). */
LSTUB_API int32_t lstub_stub_skirt(double zs, double z0, double f_over_f1, double *db, lstub_error *err);
/* Longest stub by the rule of thumb 0.3 inch Gb/s: 0.0254 * 0.3e9/bit_rate, in m.
** Source: E. Bogatin, rule of thumb 18, EDN Asia, 19 Jan 2015. For comparison only. */
LSTUB_API int32_t lstub_rule_of_thumb_length(double bit_rate, double *length, lstub_error *err);
/* Coaxial line of a barrel in an antipad: capacitance (F/m), inductance (H/m), impedance (ohm).
** C' = 2 pi eps0 Dk/ln(b/a), L' = (mu0/2 pi) ln(b/a). Textbook. Any output may be null. */
LSTUB_API int32_t lstub_coax(double inner_diameter, double outer_diameter, double dk,
                             double *capacitance, double *inductance, double *impedance, lstub_error *err);
/* Loop inductance (H/m) of a barrel with `count` return vias on a circle of radius `distance`:
** (mu0/2 pi)[ln(s/a) + (1/M) ln(s/(M r_g))]. Derived; M = 1 is the two-wire line with s >> a.
** Refused where the return vias would touch each other or the barrel. */
LSTUB_API int32_t lstub_return_inductance(double drill, int32_t count, double distance, double return_drill,
                                          double *inductance, lstub_error *err);
/* Two equal barrels at `pitch`: odd-mode inductance of one (H/m), (mu0/2 pi) acosh(s/d); and the
** differential impedance (eta0/(pi sqrt(Dk))) acosh(s/d) without planes. Textbook (two-wire line). */
LSTUB_API int32_t lstub_twin_rod(double drill, double pitch, double dk, double *odd_inductance,
                                 double *differential_impedance, lstub_error *err);
/* Capacitance (F) between a barrel and one plane of an infinite plate pair of spacing h: the sum over
** odd modes of 8 pi eps (1 - K0(k b)/K0(k a))/(h ln(b/a) k^2), static, uniaxial dielectric.
** Source: Zhang, Fan, Selli, Cocchini, de Paulis, IEEE T-MTT 56(9), 2008. Good to 1e-6 relative of that sum.
** Twice that and the plane's coaxial part is 1 to 9 percent above electrostatic finite elements, for the TEM field
** assumed in the antipad. */
LSTUB_API int32_t lstub_plate_capacitance(double drill, double antipad, double spacing, double dk_through_plane,
                                          double dk_in_plane, double *capacitance, lstub_error *err);
/* Capacitance (F) and inductance (H) of a whole via, handbook forms, good to 50 percent:
** C = 1.41 Dk T D1/(D2 - D1) and L = 5.08 h (ln(4h/d) + 1) with inches, pF and nH, here in SI.
** Source: Johnson, Graham, High-Speed Digital Design, 1993, ch. 7 (from memory). */
LSTUB_API int32_t lstub_handbook_capacitance(double thickness, double pad, double antipad, double dk,
                                             double *capacitance, lstub_error *err);
LSTUB_API int32_t lstub_handbook_inductance(double length, double diameter, double *inductance, lstub_error *err);

/* ---- material ----------------------------------------------------------------------------------- */
typedef struct lstub_dielectric {
    size_t size;
    double dk;              /* through-plane (data sheet) Dk at f_ref               1 to 1000          */
    double in_plane_ratio;  /* in-plane Dk over through-plane Dk; 0: 1              0.5 to 2           */
    double loss_tangent;    /* at f_ref                                             0 to 0.5           */
    double f_ref;           /* Hz; 0: 1e9                                           1e5 to 1e11        */
} lstub_dielectric;

#define LSTUB_ROUGHNESS_HAMMERSTAD 0  /* 1 + (2/pi) atan(1.4 (rms/skin depth)^2) times the loss, at most 2  */
#define LSTUB_ROUGHNESS_SPHERES    1  /* fourteen spheres stacked on a smooth surface, at most 8.3 times     */
typedef struct lstub_conductor {
    size_t  size;
    double  conductivity;   /* S/m; 0: 5.8e7                                        1e5 to 1e8         */
    double  roughness;      /* rms height, m; 0: smooth                             0 to 20e-6         */
    int32_t roughness_law, reserved; /* LSTUB_ROUGHNESS_...                                                     */
} lstub_conductor;

/* Complex relative permittivity over frequency, causal: wideband model of Djordjevic, Biljic,
** Likar-Smiljanic, Sarkar, IEEE T-EMC 43(4), 2001, through (dk, loss_tangent) at f_ref, between 1 kHz and
** 1 THz; the in-plane value is the through-plane one times in_plane_ratio.
** In   freq[n] Hz, 1e3 to 1e12.   Out  through_plane[2 n], in_plane[2 n] (re, im; im <= 0); each may be null.
** Ret  LSTUB_W_RANGE where a large loss tangent drives the real part below 1. */
LSTUB_API int32_t lstub_dielectric_permittivity(const lstub_dielectric *dielectric, const double *freq, size_t n,
                                                double *through_plane, double *in_plane, lstub_error *err);

/* ---- traces: lines from their cross-section ------------------------------------------------------- */
/* Skin depth sqrt(1/(pi f mu0 conductivity)), m. Textbook. conductivity 1e5 to 1e8 S/m, f 1e3 to 1e12 Hz. */
LSTUB_API int32_t lstub_skin_depth(double conductivity, double f, double *depth, lstub_error *err);
/* Impedance of the surface of thick copper, ohm per square: (1 + j)/(conductivity depth) K. K is complex and causal:
** its effect on the resistance is the published one of the law, the reactance follows from it (docs/theory.md).
** In   freq[n] Hz, 1e3 to 1e12.   Out  z[2 n], 0 < re <= im.
** HAMMERSTAD  Hammerstad, Jensen, MTT-S 1980.
** SPHERES     Huray et al., DesignCon 2010, for the stack of Simonovich, 2015: 14 spheres of radius 0.06 Rz on a square
**             of six radii. Rz = 2 sqrt(3) rms, as of a surface of triangles: with a measured Rz, roughness = Rz/3.4641. */
LSTUB_API int32_t lstub_conductor_surface_impedance(const lstub_conductor *conductor, const double *freq, size_t n,
                                                    double *z, lstub_error *err);

#define LSTUB_TRACE_MICROSTRIP 0   /* one plane, below                                                 */
#define LSTUB_TRACE_STRIPLINE  1   /* a plane below and a plane above                                  */
typedef struct lstub_trace {       /* "below" is towards the plane of a microstrip: mirrored on a board's bottom */
    size_t  size;
    int32_t kind;                  /* LSTUB_TRACE_...                                                  */
    int32_t no_dispersion;         /* 1: a microstrip as at low frequency, strictly causal             */
    double  width;                 /* m                                                 1e-6 to 0.01   */
    double  thickness;             /* of its copper, m; 0: a sheet, and no conductor loss    0 to 1e-3 */
    double  height_below;          /* from its lower face to the plane, m               1e-6 to 0.01   */
    double  height_above;          /* stripline: from its upper face to the plane, m    1e-6 to 0.01;
                                      microstrip: 0                                                    */
    const lstub_dielectric *dielectric_below;  /* needed                                               */
    const lstub_dielectric *dielectric_above;  /* null: as below; of a microstrip: air. Fills all above it,
                                      with a Dk no greater than below: a thin mask lies between the two */
    const lstub_conductor  *conductor;         /* of trace and planes; null: smooth, 5.8e7 S/m         */
} lstub_trace;

/* Characteristic impedance and propagation constant of a trace, lossy and dispersive: Z = sqrt(Z'/Y') ohm and
** gamma = sqrt(Z' Y') per metre, with Z' = jw L' + strip and planes, Y' = jw C'.
** Microstrip  L', C': Hammerstad, Jensen 1980, with their thickness correction: within 0.3 percent of boundary elements;
**             dispersion: Kirschning, Jansen 1982 and 1983, stated within 0.6 percent, for w/h 0.1 to 100, Dk up to 20, h below a
**             tenth of the wavelength in what lies above.
** Stripline   exact for a thin strip of one dielectric at any height (Cohn 1954 where centred); thick: Wheeler 1978 for its
**             greater width, within 0.2 percent of boundary elements, 0.7 where much nearer to one plane than thick copper
**             likes (0.1 of the distance). Two dielectrics mix by their share of the energy: within 0.2 percent in Dk for
**             Dk 10 percent apart, 1 for 50.
** Both        causal dielectrics, in-plane Dk by stretching the heights; conductor by the rule of incremental
**             inductance (Wheeler 1942) with the surface impedance above, down to the direct-current resistance of
**             the strip. Passive and causal, but for a microstrip's dispersion, which is one mode's, without loss.
** In   freq[n] Hz, 1e3 to 1e12.   Out  z[2 n], gamma[2 n] (re, im; re > 0, im of gamma > 0); each may be null.
** Ret  LSTUB_W_RANGE outside the ranges above, where the copper is thicker than wide or than a height, for a stripline above
**      its first waveguide mode, c/(sqrt(Dk)(2 w + pi b/2)), where one Dk is more than twice the other, and where a large loss
**      tangent drives a Dk below 1. */
LSTUB_API int32_t lstub_trace_line(const lstub_trace *trace, const double *freq, size_t n, double *z, double *gamma,
                                   lstub_error *err);

/* ---- networks: S-parameters ---------------------------------------------------------------------
**
** Sums on the caller's arrays. A network of p ports (1 to LSTUB_PORTS_MAX) at n frequencies is double[2 n p p]: for each
** frequency p rows of p complex numbers, row: port the wave comes out of, column: port driven. Reference impedances in
** ohm, real part 1e-6 to 1e9. Waves are power waves (Kurokawa, IEEE T-MTT 13(3), 1965), a = (V + z I)/(2 sqrt(Re z)),
** b = (V - z* I)/(2 sqrt(Re z)): with a real z the travelling ones. `out` may be the input itself. status[n] may be null.
** Items fail one by one: LSTUB_E_ARGUMENT, NaN or infinity in the data; LSTUB_E_NONE, there is no such matrix (condition
** number beyond 1e14). LSTUB_W_RANGE: condition number beyond 1e10, fewer than 6 digits are left. */

#define LSTUB_PORTS_MAX 16

/* S on other reference impedances, z_from[p] and z_to[p]; or complex ones, of each frequency: z_from[2 n p], z_to[2 n p]. */
LSTUB_API int32_t lstub_network_renormalise(const double *s, size_t n, int32_t p, const double *z_from, const double *z_to,
                                            double *out, int32_t *status, lstub_error *err);
LSTUB_API int32_t lstub_network_renormalise_complex(const double *s, size_t n, int32_t p, const double *z_from,
                                                    const double *z_to, double *out, int32_t *status, lstub_error *err);

#define LSTUB_NETWORK_S    1
#define LSTUB_NETWORK_Z    2   /* V = Z I, ohm                                                          */
#define LSTUB_NETWORK_Y    3   /* I = Y V, siemens                                                      */
#define LSTUB_NETWORK_ABCD 4   /* (V1, I1) = ABCD (V2, -I2) of the left and the right half of the ports; p even */

/* One kind of matrix from another; of 2-ports also LSTUB_NETWORK_G and _H, see Touchstone. z[p]: references of S; null: 50 ohm. */
LSTUB_API int32_t lstub_network_convert(const double *in, size_t n, int32_t p, int32_t from, int32_t to, const double *z,
                                        double *out, int32_t *status, lstub_error *err);

/* b behind a. Ports 0 .. p/2-1 are the left ones, p/2 .. p-1 the right ones (p even); a's right ones meet b's left ones, in
** this order and on the same references. In waves, so that nothing need be transmitted. */
LSTUB_API int32_t lstub_network_cascade(const double *a, const double *b, size_t n, int32_t p, double *out,
                                        int32_t *status, lstub_error *err);
/* The other way: what is measured without what stands left and right of it, measured = left, out, right in cascade. Either
** may be null. The conditions are those of what they transmit, both ways: 1/|S12 S21| of a 2-port left or right. */
LSTUB_API int32_t lstub_network_deembed(const double *measured, const double *left, const double *right, size_t n, int32_t p,
                                        double *out, int32_t *status, lstub_error *err);
/* A stub as a 2-port s[2 n 4]: zin[2 n] across a line of z_ref; infinite: nothing there. */
LSTUB_API int32_t lstub_network_shunt(const double *zin, size_t n, double z_ref, double *s, int32_t *status, lstub_error *err);
/* Mixed modes of `pair_count` pairs of ports, pairs[2 i] positive and pairs[2 i + 1] negative, and back. Order of modes:
** the pairs' differential ones, their common ones, then the ports of no pair in rising order. Vd = Vp - Vn,
** Id = (Ip - In)/2, Vc = (Vp + Vn)/2, Ic = Ip + In. z[p]: single-ended references, also unequal ones; those of the modes
** are zp + zn and zp zn/(zp + zn) (2 z and z/2 of equal ones) and go to z_mixed[p], which may be null. */
LSTUB_API int32_t lstub_network_to_mixed(const double *s, size_t n, int32_t p, const int32_t *pairs, int32_t pair_count,
                                         const double *z, double *out, double *z_mixed, int32_t *status, lstub_error *err);
LSTUB_API int32_t lstub_network_to_single(const double *s, size_t n, int32_t p, const int32_t *pairs, int32_t pair_count,
                                          const double *z, double *out, int32_t *status, lstub_error *err);

/* Largest singular value of S, sigma[n]: passive where <= 1. Largest |Sij - Sji|, difference[n]: reciprocal where 0. */
LSTUB_API int32_t lstub_network_passivity(const double *s, size_t n, int32_t p, double *sigma, int32_t *status, lstub_error *err);
LSTUB_API int32_t lstub_network_reciprocity(const double *s, size_t n, int32_t p, double *difference, int32_t *status,
                                            lstub_error *err);

/* Time domain: freq[n] (n >= 4, 0 to 1e12 Hz, rising) to f_max, the last. Evenly spaced ones keep their step, f_max over a
** whole number; others get 4 n steps. Points that are no multiples of it are interpolated, by cubics about the mean delay.
** Missing down to 0 (first > f_max/20: LSTUB_W_RANGE; > f_max/2: refused): real part even, imaginary part odd in f about
** the mean delay, through the first point and the first at twice its frequency; real at 0. Whatever lasts longer than
** 1/step wraps round. A NaN in the data fails the call. Time grows as n m, of causality as n^2 p^2.
**
** early[p p]: share of the energy of every impulse response that comes more than `resolution` before t0 (s, >= 0: 0, or the
** delay that nothing can undercut). The band is weighted by a Kaiser window (beta 10), which blurs by resolution[1] =
** 1.67/f_max: below 1e-7 (points interpolated: 1e-3) nothing can be said against the data, but an advance shorter than
** that, or beyond the band, does not show. What wraps round counts as early, and so does noise. */
LSTUB_API int32_t lstub_network_causality(const double *freq, const double *s, size_t n, int32_t p, double t0, double *early,
                                          double *resolution, lstub_error *err);
/* Response at port `to` to a unit step into port `from` at times t[m] (s; 0: the middle of the edge), out[m]. The edge is an
** integrated Gaussian of that 20 to 80 percent rise time. LSTUB_W_RANGE where rise_time < 1/f_max (more than 1e-3 of
** the edge's spectrum is beyond the band), or a time is not within -1/4 to 3/4 of 1/step. */
LSTUB_API int32_t lstub_step_response(const double *freq, const double *s, size_t n, int32_t p, int32_t to, int32_t from,
                                      double rise_time, const double *t, size_t m, double *out, lstub_error *err);
/* Impedance seen at `port` against time: z_ref (1 + rho)/(1 - rho), rho the step response of its reflection; +inf from 1 on.
** Time goes there and back; reflections behind other reflections are not taken apart. */
LSTUB_API int32_t lstub_tdr(const double *freq, const double *s, size_t n, int32_t p, int32_t port, double z_ref,
                            double rise_time, const double *t, size_t m, double *impedance, lstub_error *err);

typedef struct lstub_loss_fit {    /* a0 + a1 sqrt(f) + a2 f + a4 f^2 through an insertion loss        */
    size_t  size;
    double  f_low, f_high;         /* Hz, both included; 0: the first, the last frequency given        */
    int32_t constant;              /* 1: with a0; 0: without                                           */
    int32_t weighted;              /* 1: a point counts by 10^(-loss/20) (IEEE 802.3, 93A.3); 0: alike */
    double  symbol_rate;           /* Bd, for the figure of merit; 0: none                             */
    double  transition_time;       /* s, of the transmitter, 20 to 80 percent; 0: none                 */
    double  receiver_bandwidth;    /* Hz, of the receiver's filter; 0: 0.75 of the symbol rate         */
} lstub_loss_fit;

typedef struct lstub_loss_deviation {
    size_t  size;
    double  a0, a1, a2, a4;        /* dB, dB/sqrt(Hz), dB/Hz, dB/Hz^2                                  */
    double  rms, greatest;         /* deviation (loss less fit), dB: root mean square, largest absolute */
    double  fom;                   /* root of the mean of W deviation^2, W = sinc^2(f/fb)/((1 + (f/ft)^4)(1 + (f/fr)^8)),
                                      ft = 0.2365/transition_time; NaN without a symbol rate           */
    int64_t points;                /* frequencies within the fit                                       */
} lstub_loss_deviation;

/* loss[n], dB, at freq[n], Hz, 0 to 1e12, rising. deviation[n] (NaN outside f_low .. f_high) may be null. */
LSTUB_API int32_t lstub_insertion_loss_deviation(const double *freq, const double *loss, size_t n, const lstub_loss_fit *fit,
                                                 double *deviation, lstub_loss_deviation *out, lstub_error *err);

/* ---- Touchstone ----------------------------------------------------------------------------------- */
#define LSTUB_NETWORK_G 5          /* of files only, two ports: (I1, V2) = G (V1, I2)                  */
#define LSTUB_NETWORK_H 6          /* of files only, two ports: (V1, I2) = H (I1, V2)                  */
#define LSTUB_FORMAT_RI 0          /* real and imaginary part                                          */
#define LSTUB_FORMAT_MA 1          /* magnitude and angle in degrees                                   */
#define LSTUB_FORMAT_DB 2          /* 20 log10 of the magnitude, and angle                             */
#define LSTUB_UNIT_HZ  0
#define LSTUB_UNIT_KHZ 1
#define LSTUB_UNIT_MHZ 2
#define LSTUB_UNIT_GHZ 3
#define LSTUB_MATRIX_FULL  0
#define LSTUB_MATRIX_LOWER 1
#define LSTUB_MATRIX_UPPER 2
#define LSTUB_ORDER_21_12 0        /* two ports: second is 21                                          */
#define LSTUB_ORDER_12_21 1
#define LSTUB_ROW_SINGLE       0
#define LSTUB_ROW_DIFFERENTIAL 1
#define LSTUB_ROW_COMMON       2
typedef struct lstub_touchstone_row {  /* what a row, and the column of its number, of the matrix is   */
    int32_t kind;                  /* LSTUB_ROW_...                                                    */
    int32_t port, partner;         /* from 0; differential: port is the positive one; single: partner -1 */
} lstub_touchstone_row;

typedef struct lstub_touchstone_data { /* what a file holds: the reader gives it, the writer takes it  */
    size_t  size;
    int32_t version;               /* 1 or 2; writer: 0: 1                                             */
    int32_t ports;                 /* 1 to LSTUB_PORTS_MAX                                             */
    int32_t parameter;             /* LSTUB_NETWORK_S, _Z, _Y, _G or _H; writer: 0: S                  */
    int32_t format, unit;          /* LSTUB_FORMAT_..., LSTUB_UNIT_...: of the text only               */
    int32_t matrix, order;         /* LSTUB_MATRIX_..., LSTUB_ORDER_...: of the text only; not 0: version 2 */
    int32_t digits;                /* writer: significant digits, 1 to 17; 0: as few as give the same double
                                      back. Reader: 0                                                  */
    size_t  points, noise_points;  /* frequencies; noise data, which the reader skips and no writer writes */
    const double *freq;            /* [points] Hz, >= 0, rising                                        */
    const double *data;            /* [2 points ports ports], full, not normalised to the reference    */
    const double *reference;       /* [ports] ohm, > 0, of each port, in a mode or not; writer: null: 50 */
    const lstub_touchstone_row *rows;  /* [ports] of mixed-mode data (version 2); null: row i is port i */
    const char *const *comments; size_t comment_count;  /* lines of the head: what follows the '!'     */
} lstub_touchstone_data;

typedef struct lstub_source {      /* of bytes: how many came, 0 at the end, more than asked: cannot be read */
    size_t size;
    size_t (*read)(void *user, void *buffer, size_t bytes);
    void  *user;
} lstub_source;

typedef struct lstub_sink {        /* for bytes: 0, or else writing ends                               */
    size_t  size;
    int32_t (*write)(void *user, const void *bytes, size_t count);
    void   *user;
} lstub_sink;

typedef struct lstub_touchstone lstub_touchstone;
/* Reads a file of Touchstone 1.0, 1.1, 2.0 or 2.1 as a stream: only the numbers and the head's comments are kept, correctly
** rounded. Version 1 does not say how many ports it has: ports > 0 does, else a path that ends in .sNp, else the lines:
** a point begins a line and has 1 + 2 p^2 numbers, all other lines hold whole pairs. Noise data are counted only. What the
** standard forbids is refused: LSTUB_E_FORMAT, "line 12, column 7: ...", and so is a second option line that differs. */
LSTUB_API int32_t lstub_touchstone_load(const char *path, int32_t ports, const lstub_allocator *allocator,
                                        lstub_touchstone **out, lstub_error *err);
LSTUB_API int32_t lstub_touchstone_parse(const char *text, size_t bytes, int32_t ports, const lstub_allocator *allocator,
                                         lstub_touchstone **out, lstub_error *err);
LSTUB_API int32_t lstub_touchstone_read(const lstub_source *source, int32_t ports, const lstub_allocator *allocator,
                                        lstub_touchstone **out, lstub_error *err);
LSTUB_API void    lstub_touchstone_destroy(lstub_touchstone *file);              /* null is allowed     */
/* Its pointers live with the handle. */
LSTUB_API int32_t lstub_touchstone_get(const lstub_touchstone *file, lstub_touchstone_data *out, lstub_error *err);
/* Writes version 1.1 or 2.0. LOWER and UPPER want symmetry to 1e-12 of the matrix's largest entry. A file appears whole
** or not at all, in place of a link too: LSTUB_E_WRITE leaves what was there. Index of an error: the point. */
LSTUB_API int32_t lstub_touchstone_write(const lstub_touchstone_data *data, const lstub_sink *sink, lstub_error *err);
LSTUB_API int32_t lstub_touchstone_save(const lstub_touchstone_data *data, const char *path, lstub_error *err);
/* Ports in another order, or some of them: dst[k][i][j] = src[k][map[i]][map[j]], k < n, i, j < count, no port twice.
** dst may be src. */
LSTUB_API int32_t lstub_port_map(const double *src, size_t n, int32_t ports, const int32_t *map, int32_t count,
                                 double *dst, lstub_error *err);

/* ---- measurements --------------------------------------------------------------------------------- */
#define LSTUB_QUALITY_GOOD     0   /* or a sum of:                                                     */
#define LSTUB_QUALITY_SHALLOW  1   /* less than 6 dB below the trend                                   */
#define LSTUB_QUALITY_EDGE     2   /* the band ends before a flank is back half its depth              */
#define LSTUB_QUALITY_RIPPLE   4   /* not much more than the ripple and noise of the band: score < 8    */
#define LSTUB_QUALITY_WIDE     8   /* f_sigma > 0.05 f, or wider than 0.6 f: several stubs, or none    */
#define LSTUB_QUALITY_FLOOR   16   /* noise or the window hides the floor: depth is a bound, q NaN     */
typedef struct lstub_search {      /* for notches. 0: the default                                      */
    size_t size;
    double window;                 /* Hz the power is averaged over; 0: the median distance of minima of
                                      |S| (a period of the ripple), 3 samples to a 20th of the band, and at
                                      most an eighth of the width of the narrowest notch               */
    double f_low, f_high;          /* Hz, band looked at; 0: all there is                              */
    double depth_least;            /* dB below the trend; 0: 3                            1 to 100     */
    const lstub_allocator *allocator;  /* while it runs; null: malloc                                  */
} lstub_search;

typedef struct lstub_measured_notch {
    size_t  size;
    int32_t quality, reserved;     /* LSTUB_QUALITY_...                                                */
    double  f, f_sigma;            /* Hz, of the stub alone, trend and window taken out; 1 sigma from noise,
                                      ripple, curvature, window and trend                              */
    double  depth_db;              /* averaged |S| over the trend where that is least, dB, negative    */
    double  level_db;              /* averaged |S| as it is at f_minimum, dB                           */
    double  f_minimum;             /* Hz, where the averaged |S| itself is least: the channel's slope in it */
    double  width;                 /* Hz, between the flanks at half its depth in dB                   */
    double  q;                     /* as lstub_notch.q, of the shape fitted                            */
    double  impedance;             /* of the open line with these flanks, over that of the channel     */
    double  score;                 /* its rise on both sides over what trend and stubs leave, dB / dB; > 4 */
    double  window;                /* Hz, as used                                                      */
} lstub_measured_notch;

/* Stub notches in a measured S21 or Sdd21, in rising order. The shape of an open stub, S21 = 2/(2 + z y), is fitted to what
** the channel's loss a0 + a1 sqrt f + a2 f + a4 f^2 (dB, fitted to all but the notches) leaves. A notch has nine samples at
** least and rises from its bottom on both sides within the band. Ripple, roll-off, a noise floor and notches
** outside the band are none: *count = 0, LSTUB_OK. How and how well: docs/theory.md.
** In   freq[n] Hz, rising, any steps, n >= 16; s: re, im of the first element, the next s_stride bytes on (16: side by
**      side; 16 p p: element (i, j) of an (n, p, p) array from its address). search null: defaults.
** Out  notches[capacity], more: LSTUB_W_CAPACITY, the lowest are given; averaged_db[n], trend_db[n] or null, NaN off the band. */
LSTUB_API int32_t lstub_find_notches(const double *freq, size_t n, const double *s, size_t s_stride, const lstub_search *search,
                                     lstub_measured_notch *notches, size_t capacity, size_t stride, size_t *count,
                                     double *averaged_db, double *trend_db, lstub_error *err);

/* Dk and length of a stub from its null n (1, 3 ...), with 1-sigma errors to first order; sigmas >= 0. */
LSTUB_API int32_t lstub_fit_effective_dk(double f, double f_sigma, double length, double length_sigma, int32_t n,
                                         double *dk, double *dk_sigma, lstub_error *err);
LSTUB_API int32_t lstub_fit_length(double f, double f_sigma, double dk, double dk_sigma, int32_t n,
                                   double *length, double *length_sigma, lstub_error *err);

typedef struct lstub_fit {
    size_t  size;
    int32_t describes;             /* 0: chi2 is beyond its 99 % quantile: the model does not describe them */
    int32_t dof;                   /* coupons less parameters                                          */
    double  ratio, ratio_sigma;    /* in-plane over through-plane Dk; sigma times sqrt(chi2/dof) where > 1 */
    double  ratio_low, ratio_high; /* 95 %, Student t of dof (dof 0: normal)                           */
    double  offset, offset_sigma;  /* m, by which all stubs are longer; 0 where not asked for          */
    double  offset_low, offset_high;
    double  chi2;                  /* sum of (residual/f_sigma)^2                                      */
} lstub_fit;

/* First notch of a coupon in Hz; a status < 0 ends the fit and is returned. */
typedef int32_t lstub_predict(void *user, double ratio, double offset, size_t coupon, double *f);
/* In-plane Dk ratio (0.5 to 2), with_offset != 0: and a common offset of length (to 1e-2 m), by least squares over
** coupons: f[count], f_sigma[count] > 0 Hz. residuals[count] or null: measured less predicted, Hz.
** Ret  LSTUB_E_NONE: no minimum within the limits; LSTUB_E_GEOMETRY: these coupons do not tell the two apart. */
LSTUB_API int32_t lstub_fit_in_plane_dk(lstub_predict *predict, void *user, const double *f, const double *f_sigma,
                                        size_t count, int32_t with_offset, lstub_fit *out, double *residuals,
                                        lstub_error *err);

/* ---- stackup ------------------------------------------------------------------------------------ */
#define LSTUB_LAYER_DIELECTRIC 1
#define LSTUB_LAYER_SIGNAL     2   /* copper with traces: no plane around a barrel                     */
#define LSTUB_LAYER_PLANE      3   /* copper plane                                                     */
#define LSTUB_LAYER_MIXED      4   /* traces and plane areas: a plane where the via has an antipad     */

#define LSTUB_NAME_MAX 127         /* bytes of a layer's name                                          */
#define LSTUB_LAYERS_MAX 256
typedef struct lstub_layer {
    size_t      size;
    const char *name;       /* 1 to LSTUB_NAME_MAX bytes, no other layer has it                        */
    int32_t     kind;       /* LSTUB_LAYER_...                                                         */
    int32_t     reserved;
    double      thickness;  /* m, > 0, at most 0.1; of copper also 0: a sheet                          */
    double      tol_plus;   /* m, >= 0, at most the thickness                                          */
    double      tol_minus;  /* m, >= 0, less than the thickness                                        */
    const lstub_dielectric *dielectric;  /* of a dielectric layer: needed. Of a copper layer: the resin
                               between its copper; null: that of the dielectric above, at the top below */
    const lstub_conductor  *conductor;   /* copper layers only; null: smooth, 5.8e7 S/m                */
} lstub_layer;

typedef struct lstub_stackup lstub_stackup;
/* A stackup from its layers, top first. At least one copper layer; copper layers are kept apart by
** dielectrics; dielectrics may stand outside the outer copper (solder mask). Everything is checked. */
LSTUB_API int32_t lstub_stackup_create(const lstub_layer *layers, size_t count, size_t stride,
                                       const lstub_allocator *allocator, lstub_stackup **out, lstub_error *err);
LSTUB_API void    lstub_stackup_destroy(lstub_stackup *stackup);                 /* null is allowed     */
LSTUB_API int32_t lstub_stackup_count(const lstub_stackup *stackup);             /* layers; 0 for null  */
LSTUB_API int32_t lstub_stackup_copper_count(const lstub_stackup *stackup);
/* Layer `index` as stored; its pointers live as long as the stackup. */
LSTUB_API int32_t lstub_stackup_layer(const lstub_stackup *stackup, int32_t index, lstub_layer *out, lstub_error *err);
/* Index of the layer with that name; LSTUB_E_NONE where there is none. */
LSTUB_API int32_t lstub_stackup_find(const lstub_stackup *stackup, const char *name, int32_t *index, lstub_error *err);
/* Index of copper layer number `number`, counted from 0 at the top. */
LSTUB_API int32_t lstub_stackup_copper(const lstub_stackup *stackup, int32_t number, int32_t *index, lstub_error *err);
/* Depths of the upper and the lower face of a layer, m; each may be null. */
LSTUB_API int32_t lstub_stackup_depth(const lstub_stackup *stackup, int32_t index, double *top, double *bottom,
                                      lstub_error *err);

typedef struct lstub_interval {    /* what lies between two depths                                     */
    size_t size;
    double thickness;              /* m                                                                */
    double tol_plus, tol_minus;    /* m, worst case: the layers' tolerances added, in proportion where
                                      a layer is cut                                                   */
    double tol_rss_plus, tol_rss_minus;  /* m, root of the sum of squares                               */
    double dk_through_plane;       /* layers in series: h / sum(h_i/Dk_i); resin counted in copper     */
    double dk_in_plane;            /* layers side by side: sum(h_i Dk_i r_i)/h                         */
    double loss_tangent;           /* of the in-plane mean, at the layers' own f_ref                   */
} lstub_interval;

/* Between depth `top` and depth `bottom` > top, both within the stackup (mask included). */
LSTUB_API int32_t lstub_stackup_interval(const lstub_stackup *stackup, double top, double bottom,
                                         lstub_interval *out, lstub_error *err);

/* ---- via ---------------------------------------------------------------------------------------- */
#define LSTUB_SIDE_TOP    1
#define LSTUB_SIDE_BOTTOM 2
#define LSTUB_SIDE_BOTH   3

#define LSTUB_RETURN_NONE 0        /* no return via near: the plate pairs carry the return, and radiate */
#define LSTUB_RETURN_VIAS 1        /* return_count vias on a circle of radius return_distance          */
#define LSTUB_RETURN_WALL 2        /* a closed wall at return_distance                                 */

#define LSTUB_PAIR_NONE     0
#define LSTUB_PAIR_SEPARATE 1      /* partner barrel at pair_pitch, an antipad each                    */
#define LSTUB_PAIR_SHARED   2      /* one antipad around both: the union and the band between them     */

#define LSTUB_EDGE_OPEN    0       /* edges of planes: bare                                            */
#define LSTUB_EDGE_SHORTED 1       /* ... joined to each other all along                               */

#define LSTUB_PADS_REMOVED 0       /* non-functional pads: those on inner layers that do not connect   */
#define LSTUB_PADS_KEPT    1
typedef struct lstub_on_layer {    /* a value for one layer                                            */
    int32_t layer, reserved;       /* index in the stackup                                             */
    double  value;                 /* m                                                                */
} lstub_on_layer;

typedef struct lstub_backdrill {   /* a back-drill that has been made or is to be made                 */
    int32_t side, reserved;        /* LSTUB_SIDE_TOP or LSTUB_SIDE_BOTTOM                              */
    double  depth;                 /* m, from the outer face of that side's outer copper to the tip    */
    double  diameter;              /* m, of the bit, at least the drill                                */
} lstub_backdrill;

typedef struct lstub_via {
    size_t  size;
    int32_t start_layer, end_layer;  /* copper layers the barrel runs from and to, start above end;
                                        both 0: through, from the first copper to the last             */
    double  drill;                 /* barrel diameter (drilled hole), m                 > 0, <= 0.01   */
    double  pad_start, pad_inner, pad_end;  /* pad diameters, m; 0: none; else >= drill. pad_inner is on
                                        the inner layers that connect, and on all if pads are kept     */
    double  antipad;               /* on every plane crossed that does not connect, m; 0: mixed layers
                                        are no plane here, and planes need an entry in `antipads`      */
    const lstub_on_layer *pads;     size_t pad_count;      /* diameters that replace those above; 0: no pad */
    const lstub_on_layer *antipads; size_t antipad_count;  /* the same; 0: no plane at the via on this layer; on
                                        a plane that connects: the opening that the signal comes through */
    const lstub_on_layer *clear;    size_t clear_count;    /* diameter free of other copper around the axis
                                        (for the drill bit), where known; planes: the antipad at least */
    int32_t nonfunctional_pads;    /* LSTUB_PADS_...                                                   */
    int32_t return_kind;           /* LSTUB_RETURN_...                                                 */
    const int32_t *connects;  size_t connect_count;  /* layers where the signal enters or leaves, in any
                                        order: one or more copper layers within the span, none twice   */
    double  return_distance;       /* m; of the wall or of the circle of return vias, from the axis    */
    double  return_drill;          /* m; 0: as drill                                                   */
    int32_t return_count;          /* 1 to 1000 with LSTUB_RETURN_VIAS                                 */
    int32_t pair_kind;             /* LSTUB_PAIR_...                                                   */
    double  pair_pitch;            /* m, axis to axis, > drill                                         */
    const lstub_backdrill *backdrills; size_t backdrill_count;  /* at most one a side                  */
    int32_t pin_side, reserved;    /* side a component's pin enters from; 0: no pin                    */
    double  pin_length;            /* press-fit: least barrel to keep from that side's surface, m; 0: the pin
                                      is soldered and fills the hole, which is then never drilled      */
    const double *return_xy;       /* m, [2 return_count]: x, y of the return vias about the axis; null:
                                      evenly spread on the circle of radius return_distance. The partner of
                                      a pair is at (pair_pitch, 0). A stub's odd mode adds the mirror images of
                                      its vias, of evenly spread ones no more than 6 in all; a transition takes
                                      given places as they are                                         */
    double  outside_dk;            /* of what lies beyond the outer copper; 0: 1, air        1 to 1000 */
    double  lid_distance;          /* m, from the outer copper to a conducting lid; 0: open space      */
    double  hole_dk;               /* of what fills a drilled hole; 0: 1, air                1 to 1000 */
    const int32_t *return_spans;   /* with return_xy: [2 return_count], first and last layer each joins; null: all */
    const lstub_backdrill *partner_backdrills; size_t partner_backdrill_count;  /* of a pair's partner, where ... */
    int32_t partner_own;           /* ... 1: it has its own drills, or none; 0: it is drilled as the barrel is */
    int32_t edge_kind;             /* LSTUB_EDGE_...                                                   */
    double  edges[4];              /* m, distances from the axis to straight edges of all planes, towards -x, +x,
                                      -y, +y: all > 0, or all 0: planes without end                    */
} lstub_via;

typedef struct lstub_stub {        /* a piece of barrel beyond the outermost layers that connect        */
    size_t  size;
    int32_t side;                  /* the side it lies on: LSTUB_SIDE_TOP or LSTUB_SIDE_BOTTOM         */
    int32_t exit_layer;            /* connecting layer it hangs on                                     */
    int32_t end_layer, reserved;   /* outer layer its barrel ends on, -1 where it was drilled          */
    double  top, bottom;           /* depths of its two ends, m: face of the exit layer, end of barrel */
    double  length;                /* nominal, m                                                       */
    double  length_min, length_max;          /* worst case over the stackup's tolerances; of a drilled end
                                                over all layers to the surface it was drilled from, and
                                                without the drill's own: <= 0 where it may be cut off  */
    double  length_rss_min, length_rss_max;  /* root of the sum of squares                             */
} lstub_stub;

/* Checks a via against a stackup: LSTUB_OK, or what is wrong with it, by member, value and layer. */
LSTUB_API int32_t lstub_via_check(const lstub_stackup *stackup, const lstub_via *via, lstub_error *err);
/* The stub pieces, top one first: none, one or two. A bottom stub runs from the lower face of the lowest
** connecting copper to the outer face of the copper the barrel ends on, or to the tip of the back-drill; a
** top stub likewise. Out  stubs[2], *count. */
LSTUB_API int32_t lstub_via_stubs(const lstub_stackup *stackup, const lstub_via *via, lstub_stub *stubs,
                                  size_t stride, int32_t *count, lstub_error *err);

/* ---- model: the electrical behaviour of one geometry, compiled once ------------------------------ */
#define LSTUB_FIDELITY_DEFAULT 0   /* the most accurate one of this version: CAVITY                    */
#define LSTUB_FIDELITY_BULK    1   /* quarter wave in the laminate's through-plane Dk, coaxial impedance */
#define LSTUB_FIDELITY_LOADED  2   /* uniform line: L' from the returns, C' from each cavity's via-plate
                                      capacitance, planes and pads; capacitance at the open end        */
#define LSTUB_FIDELITY_LADDER  3   /* for sweeps: the cavity model with one static field shape an opening, a chain of
                                      scalars; where it says it is valid within 2.6 percent              */
#define LSTUB_FIDELITY_CAVITY  4   /* radial modes of every plate pair and copper layer, matched at every
                                      opening: as full-wave as a round barrel gets                     */
#define LSTUB_ALL_STUBS      (-1)  /* in place of a stub's number: all of them in parallel, the path
                                      between them neglected                                           */

typedef struct lstub_model_options {
    size_t  size;
    int32_t fidelity, reserved;    /* LSTUB_FIDELITY_...                                               */
    double  z_ref;                 /* ohm, line that the stubs load; of a pair: of one of the two; 0: 50 */
    int32_t annuli;                /* CAVITY: annuli an opening is cut into at least; 0: 4    2 to 12  */
    int32_t reserved2;
    const lstub_allocator *allocator;  /* for what batch calls need while they run; null: malloc       */
} lstub_model_options;

typedef struct lstub_model lstub_model;
/* Compiles the geometry. options null: defaults. A via without any stub compiles, and loads nothing. */
LSTUB_API int32_t lstub_model_create(const lstub_stackup *stackup, const lstub_via *via,
                                     const lstub_model_options *options, const lstub_allocator *allocator,
                                     lstub_model **out, lstub_error *err);
LSTUB_API void    lstub_model_destroy(lstub_model *model);                       /* null is allowed     */
LSTUB_API int32_t lstub_model_stub_count(const lstub_model *model);              /* 0, 1 or 2           */
LSTUB_API int32_t lstub_model_stub(const lstub_model *model, int32_t stub, lstub_stub *out, lstub_error *err);

typedef struct lstub_stub_line {   /* a stub as a line, at 1 GHz. LADDER and CAVITY, which are no lines: as the
                                      uniform line of the same first notch that holds the same charge  */
    size_t  size;
    int32_t fidelity, reserved;    /* the one that made these numbers                                  */
    double  dk_effective;          /* (c/(4 L f1))^2 of the first notch: end effects included          */
    double  dk_line;               /* c^2 L' C' of the line without its end                            */
    double  impedance;             /* sqrt(L'/C'), ohm                                                 */
    double  inductance;            /* L', H/m                                                          */
    double  capacitance;           /* C', F/m                                                          */
    double  end_capacitance;       /* at the open end, F                                               */
    double  stated_error;          /* of the first notch, relative: the largest found against full-wave data
                                      for this fidelity, see docs/theory.md; CAVITY: as lstub_notch.error */
    double  f_range;               /* Hz, top of the stated range. BULK, LOADED: an antipad radius or a plate
                                      spacing is a tenth of the wavelength in the laminate; else 110e9 */
} lstub_stub_line;
LSTUB_API int32_t lstub_model_line(const lstub_model *model, int32_t stub, lstub_stub_line *out, lstub_error *err);

/* Input impedance of a stub where it hangs on the signal path, ohm.
** In   freq[n] Hz, 1e6 to 1e12, LADDER and CAVITY to 200e9; stub: number or LSTUB_ALL_STUBS.
** Out  zin[2 n]; status[n] or null.
** Ret  LSTUB_W_RANGE above f_range of the line: an antipad radius or a plate spacing is more than a tenth
**      of the wavelength in the laminate.
** Source  BULK, LOADED: Zin = Zs coth(gamma L) with the end load, Pozar; all else: docs/theory.md. A stub that hangs on a
**         layer without plane is fed through a thin plane there of the nearest plane's antipad. */
LSTUB_API int32_t lstub_model_zin(const lstub_model *model, int32_t stub, const double *freq, size_t n,
                                  double *zin, int32_t *status, lstub_error *err);
/* Transmission past the stub on a line of z_ref matched at both ends: 2 Zin/(2 Zin + z_ref). s21[2 n]. */
LSTUB_API int32_t lstub_model_s21(const lstub_model *model, int32_t stub, const double *freq, size_t n,
                                  double *s21, int32_t *status, lstub_error *err);
/* Loss that the stubs add, dB, 0 to 300: -20 log10 |S21|. loss[n]. */
LSTUB_API int32_t lstub_model_added_loss(const lstub_model *model, int32_t stub, const double *freq, size_t n,
                                         double *loss, int32_t *status, lstub_error *err);

typedef struct lstub_notch {
    size_t  size;
    int32_t stub, reserved;        /* number of the stub that makes it                                 */
    double  f;                     /* Hz, minimum of |S21|: the notch as it is measured                */
    double  f_series;              /* Hz, zero of Im Zin next to it; NaN where there is none           */
    double  depth_db;              /* 20 log10 |S21| at f, negative; -inf never: -300 at least         */
    double  q;                     /* f over the width of the notch 3 dB above its floor; NaN where the
                                      notch is not that deep, +inf without loss                        */
    double  error;                 /* of f, relative: CAVITY estimates it for each notch from a second model
                                      of other annuli; others: stated_error of the line                */
} lstub_notch;

/* All notches of one stub, or of all, from 1e6 Hz up to f_max (to 1e12), in rising order: minima of |S21| found by
** bracketing, not multiples of the first. LADDER and CAVITY find none above 200e9. More than `capacity`: LSTUB_W_CAPACITY, the
** lowest are given, *count says how many there are. None: *count = 0, LSTUB_OK. */
LSTUB_API int32_t lstub_model_notches(const lstub_model *model, int32_t stub, double f_max, lstub_notch *notches,
                                      size_t capacity, size_t stride, size_t *count, lstub_error *err);

/* First notch of many vias on one stackup. vias: count structs, stride bytes apart. Out, each count long,
** each may be null: f1 (Hz, lowest over the via's stubs; NaN where it has none below 1e12), dk_effective of
** that stub, length of that stub (m), status. The answer for an item does not depend on its neighbours. */
LSTUB_API int32_t lstub_first_notch_batch(const lstub_stackup *stackup, const lstub_via *vias, size_t count,
                                          size_t stride, const lstub_model_options *options, double *f1,
                                          double *dk_effective, double *length, int32_t *status, lstub_error *err);

/* The same stackup with that in-plane ratio (0.5 to 2) in all its dielectrics, resin between copper included. */
LSTUB_API int32_t lstub_stackup_with_in_plane_ratio(const lstub_stackup *stackup, double ratio,
                                                    const lstub_allocator *allocator, lstub_stackup **out, lstub_error *err);
/* lstub_fit_in_plane_dk with the model: vias are the coupons, f[count] their measured first notches. An offset makes
** a stub of length L a quarter wave of L + offset. fitted: the stackup with the ratio found, or null. */
LSTUB_API int32_t lstub_fit_coupons(const lstub_stackup *stackup, const lstub_via *vias, size_t count, size_t stride,
                                    const double *f, const double *f_sigma, int32_t with_offset,
                                    const lstub_model_options *options, const lstub_allocator *allocator,
                                    lstub_stackup **fitted, lstub_fit *out, double *residuals, lstub_error *err);

/* ---- transition: the whole via as a network ------------------------------------------------------
**
** The cavity model of the whole barrel with the lines that enter and leave, return vias, partner and stubs: S-parameters. */

#define LSTUB_PORT_TRACE 0         /* a trace on one of the layers that connect                         */
#define LSTUB_PORT_COAX  1         /* a coaxial line above the plane the barrel begins on, its mouth that plane's antipad;
                                      reference: the plane's lower face                                */

typedef struct lstub_port {
    size_t  size;
    int32_t kind;                  /* LSTUB_PORT_...                                                   */
    int32_t layer;                 /* one of via.connects                                              */
    const lstub_trace *trace;      /* TRACE: cross-section; null: impedance and dk say it              */
    double  impedance;             /* ohm, of the line without `trace`                  1 to 1000      */
    double  dk;                    /* of the line without `trace`, effective; COAX: of its filling; 0: 1   1 to 1000 */
    double  loss_tangent;          /* of the line without `trace`                       0 to 0.5       */
    double  width;                 /* m, TRACE without `trace`: of the trace, for what happens over the antipads;
                                      0: the line is taken to begin at the pad                         */
    double  distance;              /* m, TRACE: from the axis to the reference plane; 0: the rim of the pad */
    double  z_ref;                 /* ohm, reference impedance; 0: 50                   1 to 1000      */
} lstub_port;

#define LSTUB_STUBS_KEPT    0      /* as drilled                                                       */
#define LSTUB_STUBS_REMOVED 1      /* as if the barrel ended on its outermost connecting layers: what the stubs do is
                                      the difference                                                   */
#define LSTUB_METAL_LOSSY   0      /* barrel and planes of the stackup's conductors, the barrel's that of its first layer */
#define LSTUB_METAL_PERFECT 1
#define LSTUB_MODE_SINGLE 0        /* of one port driven                                               */
#define LSTUB_MODE_ODD    1        /* of a pair: both barrels with opposite signs, seen on one of them (Sdd)  */
#define LSTUB_MODE_EVEN   2        /* ... with equal signs (Scc)                                       */
typedef struct lstub_transition_options {
    size_t  size;
    int32_t stubs;                 /* LSTUB_STUBS_...                                                  */
    int32_t annuli;                /* as in lstub_model_options                                        */
    int32_t metal, reserved;       /* LSTUB_METAL_...                                                  */
    double  f_table;               /* Hz, 1e9 to 200e9: S up to there is tabulated once, within 1e-9 of the model, then read in
                                      well under a microsecond: for sweeps. 0: every answer from the model */
} lstub_transition_options;

/* What a transition rests on, or not: a sum. Any but RADIATES makes the status LSTUB_W_RANGE. */
#define LSTUB_REMARK_RADIATES    1 /* no return via, partner or edge near: power leaves between the planes */
#define LSTUB_REMARK_LAUNCH      2 /* a trace over antipads outside 0.3 to 0.55 mm radius, 0.15 to 0.4 mm plane distance,
                                      or unequal ones: the fit of its launch is used beyond its data   */
#define LSTUB_REMARK_OUTER       4 /* a trace on an outer layer: derived, compared with nothing        */
#define LSTUB_REMARK_SLOT        8 /* a slot with pitch/(antipad + 0.44 h) below 0.8, or pads and drills other than 0.45 and
                                      0.25 mm in it: the fit is used beyond its data                   */
#define LSTUB_REMARK_UNEQUAL    16 /* two barrels of their own: without the flux through the openings  */
typedef struct lstub_transition lstub_transition;
/* Ports: those given, in their order; of a pair then the partner's, which mirror them. At least one; no two on one layer; a
** layer that connects without a port carries no trace. Traces leave anywhere but in each other's way: all stand out from
** the axis alone.
** Ret  LSTUB_W_RANGE with a handle: see the remarks.
** Valid to 110e9 Hz. On 21 transitions of three-dimensional full-wave runs (tests/reference, docs/theory.md). */
LSTUB_API int32_t lstub_transition_create(const lstub_stackup *stackup, const lstub_via *via, const lstub_port *ports,
                                          size_t count, size_t stride, const lstub_transition_options *options,
                                          const lstub_allocator *allocator, lstub_transition **out, lstub_error *err);
LSTUB_API void    lstub_transition_destroy(lstub_transition *transition);        /* null is allowed     */
LSTUB_API int32_t lstub_transition_ports(const lstub_transition *transition);    /* 0 for null          */
LSTUB_API int32_t lstub_transition_reference(const lstub_transition *transition, int32_t port, double *z_ref, lstub_error *err);
LSTUB_API int32_t lstub_transition_remarks(const lstub_transition *transition);
LSTUB_API const char *lstub_remark_text(int32_t remark);                         /* of one; never null  */
/* S-parameters, s[2 n p p] as in networks, at freq[n] Hz, 1e6 to 200e9; LSTUB_W_RANGE above 110e9. status[n] or null. */
LSTUB_API int32_t lstub_transition_s(const lstub_transition *transition, const double *freq, size_t n, double *s,
                                     int32_t *status, lstub_error *err);
/* Minima of |S_to,from| up to f_max that rise by 1 dB on both sides, as lstub_model_notches gives them: stub -1, f_series
** and error NaN. mode: LSTUB_MODE_...; of a mode, `to` and `from` are ports of the first barrel. */
LSTUB_API int32_t lstub_transition_notches(const lstub_transition *transition, int32_t mode, int32_t to, int32_t from,
                                           double f_max, lstub_notch *notches, size_t capacity, size_t stride,
                                           size_t *count, lstub_error *err);


/* ---- criteria: what a signal can bear ------------------------------------------------------------ */
typedef struct lstub_signal {
    size_t  size;
    int32_t levels, reserved;      /* 2: NRZ, 4: PAM4 ...; 0: 2                         2 to 64        */
    double  symbol_rate;           /* Bd                                                1e6 to 1e12    */
} lstub_signal;
LSTUB_API int32_t lstub_signal_nyquist(const lstub_signal *signal, double *nyquist, lstub_error *err);   /* Hz  */
LSTUB_API int32_t lstub_signal_bit_rate(const lstub_signal *signal, double *bit_rate, lstub_error *err); /* b/s */

typedef struct lstub_criteria {    /* each asked for when > 0; at least one                            */
    size_t size;
    double notch_over_nyquist;     /* first notch at least this many times Nyquist                     */
    double added_loss_db;          /* loss added at Nyquist at most this, dB; a notch below Nyquist fails
                                      it whatever the loss at Nyquist                                  */
} lstub_criteria;

#define LSTUB_LIMIT_NONE  0        /* no stub, or nothing below the band: nothing limits               */
#define LSTUB_LIMIT_NOTCH 1
#define LSTUB_LIMIT_LOSS  2
typedef struct lstub_margin {
    size_t  size;
    int32_t pass;                  /* 1: every criterion asked for is met                              */
    int32_t limited_by;            /* LSTUB_LIMIT_..., the criterion with the least margin             */
    double  nyquist;               /* Hz                                                               */
    double  f1;                    /* first notch, Hz; +inf without a stub or a notch where the fidelity
                                      looks for one                                                    */
    double  notch_over_nyquist;    /* f1 / nyquist                                                     */
    double  notch_margin;          /* f1 - limit, Hz; NaN if not asked                                 */
    double  added_loss_db;         /* at Nyquist                                                       */
    double  loss_margin_db;        /* limit - loss; NaN if not asked                                   */
    double  stub_length;           /* longest stub, m                                                  */
    double  rule_length;           /* 0.3 inch Gb/s over the bit rate, m: for comparison only          */
    double  rule_margin;           /* rule_length - stub_length, m                                     */
} lstub_margin;
LSTUB_API int32_t lstub_model_margin(const lstub_model *model, const lstub_signal *signal,
                                     const lstub_criteria *criteria, lstub_margin *out, lstub_error *err);

typedef struct lstub_stub_limit {
    size_t  size;
    int32_t limited_by, reserved;  /* LSTUB_LIMIT_NONE: even the whole barrel passes                   */
    double  length;                /* longest stub that passes, m; the whole stub if nothing limits; 0 if
                                      none does                                                        */
    double  stub_length;           /* of the via as it is, m                                           */
    double  margin;                /* length - stub_length, m; where nothing limits: 0, a lower bound  */
} lstub_stub_limit;

/* Longest tolerable stub: the barrel on `side`, drilled back as little as the criteria allow, the other side
** as it is. Found by bracketing on drilled geometries, to 1 nm (LADDER, CAVITY: 0.1 um, for a bit 0.2 mm over the
** drill). A via without a stub there: LSTUB_E_NONE.
** Valid as the model is; the criteria are taken to get no better as the stub grows. */
LSTUB_API int32_t lstub_longest_stub(const lstub_stackup *stackup, const lstub_via *via, int32_t side,
                                     const lstub_model_options *options, const lstub_signal *signal,
                                     const lstub_criteria *criteria, lstub_stub_limit *out, lstub_error *err);
/* The same for many vias, sides, signals and criteria: count of each, strides in bytes, stride 0: the same
** for all. out: array of structs. status may be null. */
LSTUB_API int32_t lstub_longest_stub_batch(const lstub_stackup *stackup, const lstub_via *vias, size_t via_stride,
                                           const int32_t *sides, size_t side_stride,
                                           const lstub_signal *signals, size_t signal_stride,
                                           const lstub_criteria *criteria, size_t criteria_stride, size_t count,
                                           const lstub_model_options *options, lstub_stub_limit *out,
                                           size_t out_stride, int32_t *status, lstub_error *err);
/* Highest symbol rate (Bd, up to 1e12) at which the via still meets the criteria; +inf if nothing limits. */
LSTUB_API int32_t lstub_highest_symbol_rate(const lstub_model *model, const lstub_criteria *criteria,
                                            double *symbol_rate, int32_t *limited_by, lstub_error *err);
/* Margins of many vias: as above, strides 0: the same for all; one model each, compiled within. */
LSTUB_API int32_t lstub_margin_batch(const lstub_stackup *stackup, const lstub_via *vias, size_t via_stride,
                                     const lstub_signal *signals, size_t signal_stride,
                                     const lstub_criteria *criteria, size_t criteria_stride, size_t count,
                                     const lstub_model_options *options, lstub_margin *out, size_t out_stride,
                                     int32_t *status, lstub_error *err);

/* ---- plan: what to do about it ------------------------------------------------------------------- */
#define LSTUB_TOLERANCE_WORST 0    /* drill and stackup tolerances added                               */
#define LSTUB_TOLERANCE_RSS   1    /* root of the sum of squares                                       */
typedef struct lstub_capability {  /* of the fabricator. Zero is a value but where said                */
    size_t  size;
    int32_t sides;                 /* LSTUB_SIDE_...; 0: both                                          */
    int32_t tolerance_method;      /* LSTUB_TOLERANCE_...                                              */
    double  depth_tolerance;       /* drilled depth, plus or minus, m                                  */
    double  cut_clearance;         /* least distance from the tip to the must-not-cut layer, m, with the
                                      tolerances used up                                               */
    double  residual_min;          /* least residual stub, nominal, m                                  */
    double  residual_target;       /* residual stub aimed at where there is room, nominal, m           */
    double  bit_oversize;          /* bit diameter less drill diameter, m                              */
    double  wall_clearance;        /* least distance from the wall of the drilled hole to copper, m    */
    double  aspect_ratio;          /* greatest drilled depth over bit diameter; 0: no limit            */
    const double *depths; size_t depth_count;  /* the only depths that may be drilled, m; count 0: any */
} lstub_capability;

typedef struct lstub_job {         /* one via of a board. Pointers are read while the plan is made     */
    size_t size;
    const lstub_via      *via;
    const lstub_signal   *signal;    /* null: carries no signal that matters; not judged               */
    const lstub_criteria *criteria;  /* needed with a signal                                           */
} lstub_job;

#define LSTUB_ACTION_NOT_JUDGED   0  /* no signal                                                      */
#define LSTUB_ACTION_KEEP         1
#define LSTUB_ACTION_DRILL_TOP    2
#define LSTUB_ACTION_DRILL_BOTTOM 3
#define LSTUB_ACTION_DRILL_BOTH   4
#define LSTUB_ACTION_CANNOT       5  /* fails, and cannot be drilled so that it passes                 */
#define LSTUB_ACTION_REFUSED      6  /* the via itself is in error: see `status`                       */

#define LSTUB_REASON_NO_SIGNAL       0
#define LSTUB_REASON_NO_STUB         1
#define LSTUB_REASON_PASSES          2   /* the stub is there, and within the criteria                 */
#define LSTUB_REASON_FAILS           3   /* it does not pass as it is, and is drilled                  */
#define LSTUB_REASON_LIMIT_TOO_SHORT 4   /* no residual the fabricator can hold is short enough        */
#define LSTUB_REASON_NO_ROOM         5   /* the barrel is too short to be drilled with these tolerances */
#define LSTUB_REASON_SIDE            6   /* that side may not be drilled                               */
#define LSTUB_REASON_WALL            7   /* the bit comes too near to copper on reason_layer           */
#define LSTUB_REASON_ASPECT          8   /* too deep for the bit                                       */
#define LSTUB_REASON_DEPTHS          9   /* none of the allowed depths fits                            */
#define LSTUB_REASON_PIN            10   /* the pin needs the barrel                                   */
#define LSTUB_REASON_BURIED         11   /* the barrel does not reach the surface on that side         */
#define LSTUB_REASON_DRILLED        12   /* that side has been drilled already                         */
#define LSTUB_REASON_ERROR          13   /* the via is in error                                        */
#define LSTUB_REASON_ONE_LAYER      14   /* connects on one layer only and holds no pin: no path       */
typedef struct lstub_drill_cut {   /* what is done on one side of a via                                */
    int32_t drilled;               /* 1: a back-drill is planned on this side                          */
    int32_t must_not_cut;          /* layer index                                                      */
    int32_t group, reserved;       /* row of the drill table                                           */
    double  depth;                 /* target, from that side's outer copper face, m                    */
    double  depth_least, depth_most;        /* any target between these would do, m                    */
    double  diameter;              /* of the bit, m                                                    */
    double  residual;              /* stub left, nominal, m                                            */
    double  residual_least, residual_most;  /* with the tolerances, m                                  */
    double  limit;                 /* longest stub that the criteria allow here, m                     */
} lstub_drill_cut;

typedef struct lstub_decision {
    size_t  size;
    int32_t action;                /* LSTUB_ACTION_...                                                 */
    int32_t reason;                /* LSTUB_REASON_...                                                 */
    int32_t reason_side;           /* side the reason speaks of, or 0                                  */
    int32_t reason_layer;          /* layer the reason speaks of, or -1                                */
    int32_t status;                /* of the model: LSTUB_W_RANGE ...; < 0 with REFUSED                */
    int32_t stub_count;
    lstub_drill_cut top, bottom;
    double  stub_top, stub_bottom;          /* nominal length before, m; 0: none                       */
    double  reason_value, reason_limit;     /* the two numbers compared, in the reason's unit; else NaN */
    lstub_margin before;           /* as it is                                                         */
    lstub_margin after;            /* as planned, with the longest residual; as `before` if not drilled */
} lstub_decision;

typedef struct lstub_drill_group { /* a row of the drill table                                         */
    size_t  size;
    int32_t side;
    int32_t from_layer;            /* outer copper layer the drill enters through                      */
    int32_t must_not_cut;
    int32_t hits;
    double  diameter;              /* bit, m                                                           */
    double  depth;                 /* target, m                                                        */
    double  tolerance;             /* plus or minus, m                                                 */
    double  residual_most;         /* longest stub left by this row, with the tolerances, m            */
} lstub_drill_group;

typedef struct lstub_plan_summary {
    size_t  size;
    int64_t vias;                  /* jobs                                                             */
    int64_t not_judged, keep, drill_top, drill_bottom, drill_both, cannot, refused;
    int64_t outside_range;         /* decided by a model outside its stated range                      */
    int32_t depths_top, depths_bottom;  /* different drill depths: proved fewest for the vias drilled  */
    int32_t groups;
    int32_t reserved;
    int64_t geometries;            /* different (via, signal, criteria) among the jobs, as far as the model
                                      sees them: each is computed once                                 */
    double  worst_notch_over_nyquist;  /* least over the judged vias after the plan; +inf: none        */
    double  worst_added_loss_db;       /* greatest over the judged vias after the plan                 */
} lstub_plan_summary;

typedef struct lstub_plan lstub_plan;
/* Plans a board. Vias in error do not stop it: they come out as REFUSED, and the call returns LSTUB_OK; it
** fails only for what concerns all of them. capability must not be null.
**
** A via that meets its criteria is kept. Otherwise the one drill that makes it pass is taken, the shorter cut
** first; then both. The tip may lie anywhere between the deepest place that keeps cut_clearance (or
** residual_min) clear of the must-not-cut layer and the shallowest that still passes, tolerances used up. Per
** side the fewest depths that serve all vias are found by stabbing these intervals from the right, which is
** optimal; each depth then moves as near to the residuals aimed at as its vias allow. */
LSTUB_API int32_t lstub_plan_create(const lstub_stackup *stackup, const lstub_job *jobs, size_t count,
                                    size_t stride, const lstub_capability *capability,
                                    const lstub_model_options *options, const lstub_allocator *allocator,
                                    lstub_plan **out, lstub_error *err);
LSTUB_API void    lstub_plan_destroy(lstub_plan *plan);                          /* null is allowed     */
LSTUB_API size_t  lstub_plan_count(const lstub_plan *plan);                      /* jobs                */
LSTUB_API int32_t lstub_plan_decision(const lstub_plan *plan, size_t index, lstub_decision *out, lstub_error *err);
LSTUB_API int32_t lstub_plan_group_count(const lstub_plan *plan);                /* rows                */
LSTUB_API int32_t lstub_plan_group(const lstub_plan *plan, int32_t index, lstub_drill_group *out, lstub_error *err);
LSTUB_API int32_t lstub_plan_totals(const lstub_plan *plan, lstub_plan_summary *out, lstub_error *err);
/* One line of plain English that says why: "first notch 12.9 GHz is 0.97 x Nyquist (2 wanted), adds 3.1 dB (0.3
** allowed); drill from the bottom 1.7020 mm deep, clear of IN3". A buffer of LSTUB_REASON_MAX bytes always does. */
#define LSTUB_REASON_MAX 256
LSTUB_API int32_t lstub_plan_reason(const lstub_plan *plan, size_t index, char *text, size_t bytes, lstub_error *err);
/* Plain word for an action or a reason: "keep", "drill bottom"; never null. */
LSTUB_API const char *lstub_action_name(int32_t action);
LSTUB_API const char *lstub_reason_name(int32_t reason);

#ifdef __cplusplus
}
#endif
#endif
