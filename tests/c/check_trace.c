/* Skin effect, roughness, traces: published values, independent solutions, limits, causality, passivity, what is refused. */
#include "check_util.h"

#define PI   3.14159265358979323846
#define C0   299792458.0
#define MU0  (4e-7 * PI)
#define ETA0 (MU0 * C0)

static lstub_error err;

static void setup(void) { LSTUB_INIT(err); }

static lstub_conductor copper(double conductivity, double roughness, int32_t law)
{
    lstub_conductor c;
    LSTUB_INIT(c);
    c.conductivity = conductivity;
    c.roughness = roughness;
    c.roughness_law = law;
    return c;
}

static lstub_dielectric dielectric(double dk, double loss)
{
    lstub_dielectric d;
    LSTUB_INIT(d);
    d.dk = dk;
    d.loss_tangent = loss;
    return d;
}

static lstub_trace trace(int32_t kind, double w, double t, double h1, double h2, const lstub_dielectric *below)
{
    lstub_trace x;
    LSTUB_INIT(x);
    x.kind = kind;
    x.width = w;
    x.thickness = t;
    x.height_below = h1;
    x.height_above = h2;
    x.dielectric_below = below;
    return x;
}

/* A line at one frequency: Z, gamma, and the series impedance and shunt admittance they are made of. */
typedef struct line {
    double z[2], gamma[2], series[2], shunt[2];
} line;

static line line_at(const lstub_trace *x, double f)
{
    line l;
    assert_ok(lstub_trace_line(x, &f, 1, l.z, l.gamma, &err), err);
    l.series[0] = l.z[0] * l.gamma[0] - l.z[1] * l.gamma[1];
    l.series[1] = l.z[0] * l.gamma[1] + l.z[1] * l.gamma[0];
    double n = l.z[0] * l.z[0] + l.z[1] * l.z[1];
    l.shunt[0] = (l.gamma[0] * l.z[0] + l.gamma[1] * l.z[1]) / n;
    l.shunt[1] = (l.gamma[1] * l.z[0] - l.gamma[0] * l.z[1]) / n;
    return l;
}

static double dk_of(const line *l, double f)
{
    double n = l->gamma[1] * C0 / (2 * PI * f);
    return n * n;
}

/* ---- surface impedance --------------------------------------------------------------------------- */

static const struct { double f, depth; } skin[] = {{1e9, 2.0898e-6}, {1e10, 0.66085e-6}, {2.8e10, 0.39494e-6}};

START_TEST(skin_depth)
{
    double depth;
    assert_ok(lstub_skin_depth(5.8e7, skin[_i].f, &depth, &err), err);
    assert_close(depth, skin[_i].depth, 3e-5, 0, "textbook form, sqrt(rho/(pi f mu)), worked out by hand");
}
END_TEST

static const struct {
    int32_t     law;
    double      rms, f, factor;
    const char *source;
} factors[] = {
    {0, 1e-6, 1e9, 1.1975, "Hammerstad, Jensen 1980: 1 + (2/pi) atan(1.4 (rms/depth)^2) by hand"},
    {0, 1e-6, 1e10, 1.8075, "Hammerstad, Jensen 1980: 1 + (2/pi) atan(1.4 (rms/depth)^2) by hand"},
    {0, 1e-6, 2.8e10, 1.9294, "Hammerstad, Jensen 1980: 1 + (2/pi) atan(1.4 (rms/depth)^2) by hand"},
    {1, 1.4433757e-6, 1e9, 1.2274, "stack of spheres, Simonovich 2015 (from memory), Rz = 5 um, by hand"},
    {1, 1.4433757e-6, 1e10, 2.3022, "stack of spheres, Simonovich 2015 (from memory), Rz = 5 um, by hand"},
    {1, 1.4433757e-6, 2.8e10, 3.3030, "stack of spheres, Simonovich 2015 (from memory), Rz = 5 um, by hand"},
};

START_TEST(roughness_factor)
{
    lstub_conductor c = copper(0, factors[_i].rms, factors[_i].law);
    double z[2], depth;
    assert_ok(lstub_conductor_surface_impedance(&c, &factors[_i].f, 1, z, &err), err);
    assert_ok(lstub_skin_depth(5.8e7, factors[_i].f, &depth, &err), err);
    assert_close(z[0] * 5.8e7 * depth, factors[_i].factor, 0, 5e-5, factors[_i].source);
}
END_TEST

/* The resistance is the published real factor to rounding, whatever the closed form of the complex one. */
START_TEST(roughness_real_part)
{
    for (uint64_t i = 0; i < 2000; i++) {
        double f = 1e3 * pow(1e9, test_random(1, i)), rms = 2e-8 * pow(1e3, test_random(2, i)), z[2], depth;
        lstub_conductor c = copper(1e7, rms, i % 2);
        assert_ok(lstub_conductor_surface_impedance(&c, &f, 1, z, &err), err);
        assert_ok(lstub_skin_depth(1e7, f, &depth, &err), err);
        double q = rms / depth, r = depth / (0.06 * sqrt(12.0) * rms);
        double factor = i % 2 ? 1 + 84 * PI / 36 / (1 + r + r * r / 2) : 1 + 2 / PI * atan(1.4 * q * q);
        assert_close(z[0] * 1e7 * depth, factor, 1e-12, 0, "identity: the published factor of the law");
        ck_assert(z[1] >= z[0]);
    }
}
END_TEST

START_TEST(smooth_copper)
{
    lstub_conductor c = copper(0, 0, 1);
    double f[2] = {1e3, 1e12}, z[4], depth;
    assert_ok(lstub_conductor_surface_impedance(&c, f, 2, z, &err), err);
    for (int i = 0; i < 2; i++) {
        assert_ok(lstub_skin_depth(5.8e7, f[i], &depth, &err), err);
        assert_close(z[2 * i], 1 / (5.8e7 * depth), 1e-14, 0, "textbook: (1 + j)/(conductivity depth)");
        assert_close(z[2 * i + 1], z[2 * i], 1e-15, 0, "textbook: (1 + j)/(conductivity depth)");
    }
}
END_TEST

/* ---- causality: the Kramers-Kronig relation ------------------------------------------------------- */

#define DECADE  200
#define SAMPLES (9 * DECADE)       /* 1 kHz to 1 THz, in the middle of steps of ln f */

static double sample_frequency(int i) { return 1e3 * pow(10.0, (i + 0.5) / DECADE); }

/*
** Im H from Re H for an H that is analytic and bounded for Re jw > 0: (2 w/pi) P int (Re H(x) - Re H(w))/(x^2 - w^2) dx; beyond
** the samples Re H is taken as constant. w lies between two samples, so that the pole cancels.
*/
static double partner(const double *re, int k, double re_at)
{
    double w = 1e3 * pow(10.0, (double)k / DECADE), step = log(10.0) / DECADE, sum = 0, a = 1e3, b = 1e12;
    for (int i = 0; i < SAMPLES; i++) {
        double x = sample_frequency(i);
        sum += (re[i] - re_at) * x / (x * x - w * w) * step;
    }
    sum += (re[SAMPLES - 1] - re_at) / (2 * w) * log((b + w) / (b - w)) - (re[0] - re_at) / (2 * w) * log((w + a) / (w - a));
    return 2 * w / PI * sum;
}

/* H = Z/Zs: bounded by the law's greatest factor. */
static void rough_ratio(const lstub_conductor *c, double f, double out[2])
{
    lstub_conductor smooth = copper(c->conductivity, 0, 0);
    double z[2], s[2];
    assert_ok(lstub_conductor_surface_impedance(c, &f, 1, z, &err), err);
    assert_ok(lstub_conductor_surface_impedance(&smooth, &f, 1, s, &err), err);
    out[0] = (z[0] + z[1]) / (2 * s[0]);
    out[1] = (z[1] - z[0]) / (2 * s[0]);
}

START_TEST(roughness_is_causal)
{
    lstub_conductor c = copper(0, 1e-6, _i);
    double re[SAMPLES], h[2], scale = 0, most = 0;
    for (int i = 0; i < SAMPLES; i++) {
        rough_ratio(&c, sample_frequency(i), h);
        re[i] = h[0];
        scale = fmax(scale, h[0]);
    }
    for (int k = 4 * DECADE; k <= 7 * DECADE; k += DECADE / 4) {
        rough_ratio(&c, 1e3 * pow(10.0, (double)k / DECADE), h);
        assert_close(h[1] / scale, partner(re, k, h[0]) / scale, 0, 1e-3, "Kramers-Kronig relation");
        most = fmax(most, h[1] / scale);
    }
    ck_assert(most > 0.1);         /* what a real factor would be off by */
}
END_TEST

/* gamma falls and grows as the root of f at the two ends: H = gamma/(sqrt(s) (1 + sqrt(s/s1))) is bounded. */
static void bounded_gamma(const lstub_trace *x, double f, double out[2])
{
    double s = sqrt(PI * f), g[2];
    ck_assert_int_ge(lstub_trace_line(x, &f, 1, NULL, g, &err), 0);      /* beyond its range, but the form is what it is */
    /* sqrt(jw) = s (1 + j), sqrt(jw/w1) = (1 + j) sqrt(f/f1)/sqrt(2) */
    double q = sqrt(f / 1e8) / sqrt(2.0), a = 1 + q, b = q, re = s * (a - b), im = s * (a + b), n = re * re + im * im;
    out[0] = (g[0] * re + g[1] * im) / n;
    out[1] = (g[1] * re - g[0] * im) / n;
}

START_TEST(trace_is_causal)
{
    lstub_dielectric below = dielectric(3.6, 0.01), above = dielectric(3.4, 0.02);
    lstub_conductor c = copper(0, 1e-6, _i % 2);
    int32_t kind = _i / 2;
    lstub_trace x = trace(kind, 1e-4, 17e-6, 1e-4, kind * 1.5e-4, &below);
    x.no_dispersion = 1;
    static double re[SAMPLES];
    double h[2], scale = 0, most = 0;
    x.dielectric_above = &above;
    x.conductor = &c;
    for (int i = 0; i < SAMPLES; i++) {
        bounded_gamma(&x, fmin(sample_frequency(i), 1e12), h);
        re[i] = h[0];
        scale = fmax(scale, fabs(h[0]));
    }
    for (int k = 4 * DECADE; k <= 7 * DECADE; k += DECADE / 4) {
        bounded_gamma(&x, 1e3 * pow(10.0, (double)k / DECADE), h);
        assert_close(h[1] / scale, partner(re, k, h[0]) / scale, 0, 1e-3, "Kramers-Kronig relation");
        most = fmax(most, fabs(h[1]) / scale);
    }
    ck_assert(most > 0.02);        /* what a real factor or a lossless line would be off by */
}
END_TEST

/* ---- stripline ------------------------------------------------------------------------------------ */

static const struct { double w, z; } cohn[] = {{0.25, 139.917}, {0.5, 100.432}, {0.7, 82.595}, {1, 65.354}, {2, 38.579}};

START_TEST(thin_stripline_in_the_middle)
{
    lstub_dielectric air = dielectric(1, 0);
    lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, cohn[_i].w * 1e-3, 0, 0.5e-3, 0.5e-3, &air);
    line l = line_at(&x, 1e9);
    assert_close(l.z[0], cohn[_i].z, 1e-5, 0, "Cohn 1954, exact: (eta0/4) K(k)/K(k'), k = sech(pi w/2b)");
}
END_TEST

/* Cohn: widths with sech(pi w1/2b) = tanh(pi w2/2b) are dual: their impedances multiply to (eta0/4)^2. */
START_TEST(thin_stripline_duality)
{
    lstub_dielectric air = dielectric(1, 0);
    for (int i = 0; i < 30; i++) {
        double a = 0.02 * pow(10.0, 2.3 * i / 29.0), b = 2 / PI * atanh(1 / cosh(PI * a / 2));
        if (b < 1e-3)
            continue;
        lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, a * 1e-3, 0, 0.5e-3, 0.5e-3, &air);
        lstub_trace y = trace(LSTUB_TRACE_STRIPLINE, b * 1e-3, 0, 0.5e-3, 0.5e-3, &air);
        assert_close(line_at(&x, 1e9).z[0] * line_at(&y, 1e9).z[0], ETA0 * ETA0 / 16, 1e-8, 0, "identity: Cohn's k and k' exchanged");
    }
}
END_TEST

/* Galerkin solution in the spectral domain, charges as Chebyshev polynomials over the edge's root; good to 2e-4. Width and height
** below in units of the plane distance; capacitance with Dk of e1 below and e2 above over that with 1. */
static const struct { double w, h1, z, c_11, c_15, c_51; } spectral[] = {
    {0.2, 0.25, 132.931, 1.060111, 1.299403, 1.197354}, {0.5, 0.25, 82.914, 1.064465, 1.321370, 1.175937},
    {1, 0.25, 52.037, 1.068148, 1.340099, 1.158068},    {0.5, 0.1, 48.396, 1.077192, 1.384330, 1.110883},
    {0.5, 0.4, 97.799, 1.055487, 1.277266, 1.222255},   {0.2, 0.1, 88.036, 1.069634, 1.345843, 1.147339},
    {0.1, 0.05, 88.774, 1.070513, 1.349850, 1.142077},
};

START_TEST(thin_stripline_at_any_height)
{
    static const char *source = "derived: spectral Galerkin solution";
    double w = spectral[_i].w * 1e-3, h1 = spectral[_i].h1 * 1e-3, h2 = 1e-3 - h1;
    lstub_dielectric one = dielectric(3, 0), e11 = dielectric(3.3, 0), e15 = dielectric(4.5, 0);
    lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, w, 0, h1, h2, &one);
    assert_close(line_at(&x, 1e9).z[0] * sqrt(3.0), spectral[_i].z, 2e-4, 0, source);
    lstub_trace y = trace(LSTUB_TRACE_STRIPLINE, w, 0, h2, h1, &one);
    assert_close(line_at(&y, 1e9).z[0], line_at(&x, 1e9).z[0], 1e-12, 0, "identity: the mirror image");
    x.dielectric_above = &one;
    x.dielectric_below = &e11;
    line l = line_at(&x, 1e9);
    assert_close(dk_of(&l, 1e9) / 3, spectral[_i].c_11, 2e-3, 0, source);
    x.dielectric_below = &e15;
    l = line_at(&x, 1e9);
    assert_close(dk_of(&l, 1e9) / 3, spectral[_i].c_15, 1e-2, 0, source);
    x.dielectric_below = &one;
    x.dielectric_above = &e15;
    l = line_at(&x, 1e9);
    assert_close(dk_of(&l, 1e9) / 3, spectral[_i].c_51, 5e-3, 0, source);
}
END_TEST

/* With the plane above far away a stripline is a microstrip in a vacuum. */
START_TEST(stripline_without_its_upper_plane)
{
    lstub_dielectric air = dielectric(1, 0);
    for (double u = 0.2; u < 8; u *= 1.5) {
        lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, u * 2e-5, 0, 2e-5, 1e-2, &air);
        lstub_trace y = trace(LSTUB_TRACE_MICROSTRIP, u * 2e-5, 0, 2e-5, 0, &air);
        assert_close(line_at(&y, 1e9).z[0], line_at(&x, 1e9).z[0], 3e-4, 0, "limit; Hammerstad, Jensen 1980 state 0.03 % in a vacuum");
    }
}
END_TEST

/*
** Line impedances found on a 25 um grid (three-dimensional reference runs, strips of 0.113 mm, Dk 3.5). On a grid a strip acts
** wider than drawn by a fixed part of a step: one width must explain four cavities, one of them off-centre.
*/
static const struct { double h1, h2, z; } grid[] = {
    {1e-4, 1e-4, 48.80}, {0.5e-4, 0.5e-4, 30.798}, {1.5e-4, 1.5e-4, 60.771}, {0.5e-4, 1.5e-4, 39.813}};

START_TEST(striplines_of_the_reference_runs)
{
    static const char *source = "three-dimensional full-wave runs, see tests/data/fdtd3d/README.md";
    lstub_dielectric d = dielectric(3.5, 0);
    lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, 118.8e-6, 0, grid[_i].h1, grid[_i].h2, &d);
    assert_close(line_at(&x, 1e10).z[0], grid[_i].z, 4e-3, 0, source);
    x.width = 113e-6;
    assert_close(line_at(&x, 1e10).z[0], grid[_i].z, 0.045, 0, source);
}
END_TEST

/*
** Boundary elements, graded towards the corners (300 to 500 of them, converged to 1e-5): impedance in a vacuum, and its
** incremental inductance, planes and strip, over mu0 in units of 1/length. Room: what the formulas are stated to be off.
*/
static const struct { int32_t kind; double w, t, h1, h2, z, incremental, z_room, loss_room; } thick[] = {
    {1, 0.5, 0.1, 0.45, 0.45, 83.066, 1.4184, 1e-3, 0.01},  {1, 1, 0.1, 0.45, 0.45, 55.700, 0.8489, 1e-3, 0.01},
    {1, 0.2, 0.1, 0.45, 0.45, 119.462, 2.4719, 1e-3, 0.01}, {1, 0.5, 0.2, 0.4, 0.4, 71.605, 1.1967, 1e-3, 0.01},
    {1, 0.2, 0.2, 0.4, 0.4, 101.039, 1.9111, 1e-3, 0.01},   {1, 0.15, 0.017, 0.1, 0.1, 72.234, 5.4428, 1e-3, 0.01},
    {1, 0.15, 0.035, 0.1, 0.1, 68.019, 4.6819, 1e-3, 0.01}, {1, 0.1, 0.035, 0.2, 0.2, 118.488, 5.6339, 1e-3, 0.01},
    {1, 0.5, 0.06, 0.22, 0.72, 70.901, 1.7639, 2e-3, 0.01}, {1, 0.15, 0.035, 0.1, 0.3, 85.444, 4.8289, 2e-3, 0.01},
    {1, 0.3, 0.018, 0.1, 0.2, 56.301, 3.1940, 2e-3, 0.01},  {1, 1, 0.1, 0.2, 0.7, 41.646, 1.0025, 2e-3, 0.01},
    {1, 0.2, 0.1, 0.1, 0.8, 71.749, 3.3376, 8e-3, 0.03},
    {0, 0.2, 0.035, 0.1, 0, 80.564, 4.3070, 3e-3, 0.01},    {0, 0.1, 0.035, 0.1, 0, 108.492, 6.3897, 3e-3, 0.01},
    {0, 0.3, 0.018, 0.2, 0, 99.405, 3.2466, 3e-3, 0.01},    {0, 0.6, 0.005, 0.635, 0, 128.577, 1.9372, 3e-3, 0.01},
    {0, 0.15, 0.05, 0.1, 0, 89.371, 4.7012, 3e-3, 0.01},
};

START_TEST(thick_strips)
{
    static const char *source = "derived: boundary elements";
    lstub_dielectric air = dielectric(1, 0);
    double f = 1e11, rs = sqrt(PI * f * MU0 / 5.8e7);
    lstub_trace x = trace(thick[_i].kind, 1e-3 * thick[_i].w, 1e-3 * thick[_i].t, 1e-3 * thick[_i].h1, 1e-3 * thick[_i].h2, &air);
    double z[2], g[2];
    ck_assert_int_ge(lstub_trace_line(&x, &f, 1, z, g, &err), 0);      /* the largest ones are in the range of waveguide modes here */
    double r = z[0] * g[0] - z[1] * g[1], l = (z[0] * g[1] + z[1] * g[0] - r) / (2 * PI * f);
    assert_close(l * C0, thick[_i].z, thick[_i].z_room, 0, source);
    assert_close(1e-3 * r / rs, thick[_i].incremental, thick[_i].loss_room, 0, source);
}
END_TEST

/* ---- microstrip ----------------------------------------------------------------------------------- */

static const struct { double u, dk, dk_eff, z; } static_microstrip[] = {
    {1, 1, 1, 126.424},         {1, 9.8, 6.5790, 49.289}, {2, 4.2, 3.2070, 49.714},
    {0.5, 4.2, 2.9302, 97.384}, {1.9, 4.4, 3.3292, 50.218}};

START_TEST(thin_microstrip)
{
    static const char *source = "Hammerstad, Jensen 1980, worked out by hand";
    lstub_dielectric d = dielectric(static_microstrip[_i].dk, 0);
    lstub_trace x = trace(LSTUB_TRACE_MICROSTRIP, static_microstrip[_i].u * 1e-3, 0, 1e-3, 0, &d);
    line l = line_at(&x, 1e6);
    assert_close(l.z[0], static_microstrip[_i].z, 2e-5, 0, source);
    assert_close(dk_of(&l, 1e6), static_microstrip[_i].dk_eff, 2e-5, 0, source);
}
END_TEST

static const struct { double w, h, dk, f, z, dk_eff; } dispersive[] = {
    {0.0002, 0.0001, 4.2, 1e+09, 49.71351, 3.20725197},     {0.0002, 0.0001, 4.2, 2.8e+10, 49.7020302, 3.23749465},
    {0.0002, 0.0001, 4.2, 1.1e+11, 50.7768079, 3.38489216}, {0.0001, 0.0001, 3.6, 1e+10, 77.480214, 2.66459365},
    {0.0001, 0.0001, 3.6, 5.6e+10, 77.6571159, 2.69859278}, {0.0001, 0.0001, 3.6, 1.1e+11, 78.8533178, 2.75499534},
    {0.0003, 0.0002, 3, 2.8e+10, 68.1390759, 2.36795743},   {0.0003, 0.0002, 3, 1.1e+11, 72.8482365, 2.51575515},
    {0.0006, 0.000635, 9.8, 1e+10, 51.1092099, 6.88832431}, {0.0006, 0.000635, 9.8, 2.8e+10, 56.8824777, 7.69896648},
};

START_TEST(microstrip_dispersion)
{
    static const char *source = "scikit-rf 1.x, media MLine, hammerstadjensen and kirschningjansen, no loss";
    lstub_dielectric d = dielectric(dispersive[_i].dk, 0);
    lstub_trace x = trace(LSTUB_TRACE_MICROSTRIP, dispersive[_i].w, 0, dispersive[_i].h, 0, &d);
    line l = line_at(&x, dispersive[_i].f);
    assert_close(l.z[0], dispersive[_i].z, 1e-8, 0, source);
    assert_close(dk_of(&l, dispersive[_i].f), dispersive[_i].dk_eff, 1e-8, 0, source);
}
END_TEST

START_TEST(microstrip_without_dispersion)
{
    lstub_dielectric d = dielectric(9.8, 0);
    lstub_trace x = trace(LSTUB_TRACE_MICROSTRIP, 1e-3, 0, 1e-3, 0, &d);
    line low = line_at(&x, 1e5);
    x.no_dispersion = 1;
    line high = line_at(&x, 2e10);
    assert_close(high.z[0], low.z[0], 1e-6, 0, "limit: low frequency");
    assert_close(dk_of(&high, 2e10), dk_of(&low, 1e5), 1e-6, 0, "limit: low frequency");
    x.no_dispersion = 0;
    line as_it_is = line_at(&x, 2e10);
    ck_assert(dk_of(&as_it_is, 2e10) > 1.1 * dk_of(&low, 1e5));
}
END_TEST

/* One dielectric above and below, however many ways it is said: the wave goes as in that dielectric. */
START_TEST(one_dielectric)
{
    lstub_dielectric d = dielectric(3.7, 0.015);
    lstub_trace x = trace(LSTUB_TRACE_MICROSTRIP, 2e-4, 0, 1e-4, 0, &d), y = trace(LSTUB_TRACE_STRIPLINE, 2e-4, 0, 1e-4, 1.7e-4, &d);
    x.dielectric_above = &d;
    for (double f = 1e4; f < 1e11; f *= 7) {
        double eps[2];
        assert_ok(lstub_dielectric_permittivity(&d, &f, 1, eps, NULL, &err), err);
        const lstub_trace *both[2] = {&x, &y};
        for (int i = 0; i < 2; i++) {
            line l = line_at(both[i], f);
            double k2 = (2 * PI * f / C0) * (2 * PI * f / C0);
            assert_close(l.gamma[1] * l.gamma[1] - l.gamma[0] * l.gamma[0], k2 * eps[0], 1e-9, 0, "identity: gamma^2 = -k0^2 eps");
            assert_close(-2 * l.gamma[1] * l.gamma[0], k2 * eps[1], 1e-9, 0, "identity: gamma^2 = -k0^2 eps");
        }
    }
}
END_TEST

/* Everything filled with Dk times as much: the static numbers scale; and a denser medium only slows the dispersion. */
START_TEST(dielectric_above_scales)
{
    lstub_dielectric d4 = dielectric(4, 0), d8 = dielectric(8, 0), d2 = dielectric(2, 0);
    lstub_trace x = trace(LSTUB_TRACE_MICROSTRIP, 2e-4, 0, 1e-4, 0, &d4), y = x;
    y.dielectric_below = &d8;
    y.dielectric_above = &d2;
    line a = line_at(&x, 3e10 * sqrt(2.0)), b = line_at(&y, 3e10);
    assert_close(b.z[0] * sqrt(2.0), a.z[0], 1e-12, 0, "identity: Maxwell's equations scale");
    assert_close(dk_of(&b, 3e10), 2 * dk_of(&a, 3e10 * sqrt(2.0)), 1e-12, 0, "identity: Maxwell's equations scale");
}
END_TEST

/* Uniaxial: C' is that of the root of the two Dk between heights stretched by the root of their ratio; L' knows no dielectric. */
START_TEST(anisotropy)
{
    for (int32_t kind = 0; kind < 2; kind++) {
        lstub_dielectric d = dielectric(3.6, 0), same = dielectric(3.6 * sqrt(1.21), 0), air = dielectric(1, 0),
                         equal = dielectric(3.6, 0);
        d.in_plane_ratio = 1.21;
        lstub_trace x = trace(kind, 1.5e-4, 0, 1e-4, kind * 1.4e-4, &d), s = trace(kind, 1.5e-4, 0, 1.1e-4, kind * 1.54e-4, &same);
        lstub_trace v = trace(kind, 1.5e-4, 0, 1e-4, kind * 1.4e-4, &air);
        line a = line_at(&x, 1e6), b = line_at(&s, 1e6), c = line_at(&v, 1e6);
        assert_close(a.shunt[1], b.shunt[1], 1e-6, 0, "identity: stretched coordinates");
        assert_close(a.series[1], c.series[1], 1e-6, 0, "identity: no magnetic material");
        /* with thickness there is no such identity, but no step either */
        x.thickness = s.thickness = 3e-5;
        d.in_plane_ratio = 1.0001;
        s.dielectric_below = &equal;
        s.height_below = x.height_below;
        s.height_above = x.height_above;
        assert_close(line_at(&x, 1e6).shunt[1], line_at(&s, 1e6).shunt[1], 2e-4, 0, "limit: isotropic");
    }
}
END_TEST

/* ---- loss ----------------------------------------------------------------------------------------- */

/* Pozar, Microwave Engineering, stripline example (from memory): b = 3.2 mm, Dk 2.2, tan d 0.001, 50 ohm, copper of 0.01 mm, 10 GHz:
** w = 2.66 mm, alpha_d = 0.155, alpha_c = 0.122 Np/m by Cohn's closed form, which is itself good to some percent. */
START_TEST(textbook_stripline_loss)
{
    lstub_dielectric d = dielectric(2.2, 0.001), no_loss = dielectric(2.2, 0);
    lstub_conductor c = copper(5.813e7, 0, 0);
    d.f_ref = 1e10;
    lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, 2.66e-3, 1e-5, 1.595e-3, 1.595e-3, &d);
    x.conductor = &c;
    line all = line_at(&x, 1e10);
    x.dielectric_below = &no_loss;
    line metal = line_at(&x, 1e10);
    assert_close(metal.gamma[0], 0.122, 0.03, 0, "Pozar, example of a 50 ohm stripline (from memory), conductor");
    assert_close(all.gamma[0] - metal.gamma[0], 0.155, 0.005, 0, "Pozar, example of a 50 ohm stripline (from memory), dielectric");
}
END_TEST

/* At the low end the strip's resistance is that of its cross-section; the planes' fades as the root of f. */
START_TEST(direct_current_resistance)
{
    lstub_dielectric d = dielectric(3.6, 0.01);
    for (int32_t kind = 0; kind < 2; kind++)
        for (int32_t law = 0; law < 2; law++) {
            lstub_conductor c = copper(4e7, 2e-6, law);
            lstub_trace x = trace(kind, 1.2e-4, 18e-6, 1e-4, kind * 2e-4, &d);
            x.conductor = &c;
            assert_close(line_at(&x, 1e3).series[0], 1 / (4e7 * 1.2e-4 * 18e-6), 2e-3, 0, "textbook: rho/(w t)");
        }
}
END_TEST

/* A roughness much above the skin depth doubles the resistance, and adds up to as much reactance as it does resistance. */
START_TEST(rough_trace)
{
    lstub_dielectric d = dielectric(3.6, 0);
    lstub_conductor c = copper(0, 1e-5, 0);
    lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, 1.2e-4, 18e-6, 1e-4, 2e-4, &d), smooth = x;
    x.conductor = &c;
    line a = line_at(&x, 1e11), b = line_at(&smooth, 1e11);
    assert_close(a.series[0], 2 * b.series[0], 1e-3, 0, "limit: Hammerstad's factor ends at 2");
    assert_close(a.series[1] - b.series[1], a.series[0] - b.series[0], 5e-2, 0, "limit: the phase of the skin effect");
}
END_TEST

/* A thin sheet has no loss but the dielectric's. */
START_TEST(sheet)
{
    lstub_dielectric d = dielectric(3.6, 0);
    lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, 1.2e-4, 0, 1e-4, 2e-4, &d);
    line l = line_at(&x, 1e10);
    assert_close(l.gamma[0], 0, 0, 1e-12 * l.gamma[1], "limit: no loss");
    assert_close(l.z[1], 0, 0, 1e-12 * l.z[0], "limit: no loss");
}
END_TEST

/* In any range: no NaN, positive real series impedance and shunt admittance, a wave that decays forwards. */
START_TEST(passive_everywhere)
{
    double f[28], z[56], g[56];
    for (int i = 0; i < 28; i++)
        f[i] = fmin(1e3 * pow(10.0, i / 3.0), 1e12);
    for (uint64_t n = 0; n < 4000; n++) {
        lstub_dielectric below = dielectric(pow(test_random(1, n) < 0.1 ? 1000 : 12, test_random(2, n)), 0.05 * test_random(3, n));
        lstub_dielectric above = dielectric(pow(below.dk, test_random(4, n)), 0.05 * test_random(5, n));
        lstub_conductor c = copper(0, 5e-6 * test_random(6, n), n % 2);
        below.in_plane_ratio = 0.5 + 1.5 * test_random(7, n);
        int32_t kind = n % 3 == 0;
        lstub_trace x = trace(kind, 1e-6 * pow(1e4, test_random(8, n)), n % 5 ? 1e-9 * pow(1e6, test_random(9, n)) : 0,
                              1e-6 * pow(1e4, test_random(10, n)), kind * 1e-6 * pow(1e4, test_random(11, n)), &below);
        x.conductor = &c;
        if (n % 2)
            x.dielectric_above = &above;
        int32_t status = lstub_trace_line(&x, f, 28, z, g, &err);
        if (status < 0) {
            ck_assert_msg(strstr(err.message, "dielectric_above: Dk") != NULL, "%s", err.message);
            continue;
        }
        for (int i = 0; i < 28; i++) {
            double *zi = z + 2 * i, *gi = g + 2 * i, series = zi[0] * gi[0] - zi[1] * gi[1], shunt = gi[0] * zi[0] + gi[1] * zi[1];
            ck_assert_msg(zi[0] > 0 && gi[0] >= 0 && gi[1] > 0 && fabs(zi[1]) <= 1.0001 * zi[0] + 1e-9 && isfinite(zi[0] + zi[1] + gi[0] + gi[1]),
                          "case %d at %g Hz: z = %g %+gj, gamma = %g %+gj", (int)n, f[i], zi[0], zi[1], gi[0], gi[1]);
            ck_assert(series >= -1e-12 * zi[0] * gi[1] && shunt >= -1e-12 * zi[0] * gi[1]);
        }
    }
}
END_TEST

/* ---- use and misuse ------------------------------------------------------------------------------- */

START_TEST(arrays_are_items_side_by_side)
{
    lstub_dielectric d = dielectric(4.2, 0.02);
    lstub_trace x = trace(LSTUB_TRACE_MICROSTRIP, 2e-4, 35e-6, 1e-4, 0, &d);
    double f[50], z[100], g[100], part[100];
    for (int i = 0; i < 50; i++)
        f[i] = 1e3 * pow(10.0, 0.16 * i);
    assert_ok(lstub_trace_line(&x, f, 50, z, g, &err), err);
    assert_ok(lstub_trace_line(&x, f, 20, part, NULL, &err), err);
    assert_ok(lstub_trace_line(&x, f + 20, 30, part + 40, NULL, &err), err);
    ck_assert_mem_eq(z, part, sizeof z);
    assert_ok(lstub_trace_line(&x, f, 50, NULL, part, &err), err);
    ck_assert_mem_eq(g, part, sizeof g);
    assert_ok(lstub_trace_line(&x, NULL, 0, NULL, NULL, &err), err);
}
END_TEST

/* A program that knows only the first two numbers of a conductor. */
START_TEST(older_conductor)
{
    lstub_conductor c = copper(5e7, 1e-6, 1), law = copper(5e7, 1e-6, 0);
    double f = 1e10, z[2], want[2];
    c.size = offsetof(lstub_conductor, roughness_law);
    assert_ok(lstub_conductor_surface_impedance(&c, &f, 1, z, &err), err);
    assert_ok(lstub_conductor_surface_impedance(&law, &f, 1, want, &err), err);
    ck_assert_mem_eq(z, want, sizeof z);
}
END_TEST

typedef struct misuse {
    void      (*spoil)(lstub_trace *x, lstub_dielectric *d, lstub_conductor *c);
    int32_t     status;
    const char *words;
} misuse;

#define SPOIL(name, what) static void name(lstub_trace *x, lstub_dielectric *d, lstub_conductor *c) { (void)x; (void)d; (void)c; what; }
SPOIL(kind, x->kind = 2)
SPOIL(no_dispersion, x->no_dispersion = 2)
SPOIL(width_zero, x->width = 0)
SPOIL(width_nan, x->width = NAN)
SPOIL(width_large, x->width = 0.02)
SPOIL(thickness_minus, x->thickness = -1e-6)
SPOIL(thickness_large, x->thickness = 2e-3)
SPOIL(below_zero, x->height_below = 0)
SPOIL(above_zero, x->height_above = 0)
SPOIL(above_infinite, x->height_above = INFINITY)
SPOIL(above_of_microstrip, x->kind = 0)
SPOIL(no_dielectric, x->dielectric_below = NULL)
SPOIL(dk, d->dk = 0.5)
SPOIL(dense_above, (x->kind = 0, x->height_above = 0, d->dk = 2))
SPOIL(roughness, c->roughness = 1e-3)
SPOIL(roughness_law, c->roughness_law = 2)
SPOIL(conductor_reserved, c->reserved = 7)
SPOIL(size, x->size = 8)

static const misuse misuses[] = {
    {kind, LSTUB_E_ARGUMENT, "kind = 2"},
    {no_dispersion, LSTUB_E_ARGUMENT, "no_dispersion = 2|0 or 1"},
    {width_zero, LSTUB_E_ARGUMENT, "width = 0 m|1e-06"},
    {width_nan, LSTUB_E_ARGUMENT, "width = nan"},
    {width_large, LSTUB_E_ARGUMENT, "width = 0.02 m|0.01"},
    {thickness_minus, LSTUB_E_ARGUMENT, "thickness = -1e-06 m|0"},
    {thickness_large, LSTUB_E_ARGUMENT, "thickness = 0.002 m|0.001"},
    {below_zero, LSTUB_E_ARGUMENT, "height_below = 0 m"},
    {above_zero, LSTUB_E_ARGUMENT, "height_above = 0 m"},
    {above_infinite, LSTUB_E_ARGUMENT, "height_above = inf"},
    {above_of_microstrip, LSTUB_E_ARGUMENT, "height_above = 0.0001 m|0"},
    {no_dielectric, LSTUB_E_NULL, "dielectric_below"},
    {dk, LSTUB_E_ARGUMENT, "dielectric_below|dk = 0.5"},
    {dense_above, LSTUB_E_ARGUMENT, "dielectric_above|Dk = 3|2"},
    {roughness, LSTUB_E_ARGUMENT, "roughness = 0.001 m|2e-05"},
    {roughness_law, LSTUB_E_ARGUMENT, "roughness_law = 2|HAMMERSTAD"},
    {conductor_reserved, LSTUB_E_SIZE, "reserved = 7"},
    {size, LSTUB_E_SIZE, "trace"},
};

START_TEST(bad_traces)
{
    lstub_dielectric d = dielectric(3, 0), above = dielectric(3, 0);
    lstub_conductor c = copper(0, 0, 0);
    lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, 1e-4, 1e-5, 1e-4, 1e-4, &d);
    double f = 1e9, z[2], g[2];
    x.dielectric_above = &above;
    x.conductor = &c;
    misuses[_i].spoil(&x, &d, &c);
    memset(z, POISON, sizeof z);
    memset(g, POISON, sizeof g);
    assert_refused(lstub_trace_line(&x, &f, 1, z, g, &err), misuses[_i].status, err, misuses[_i].words);
    ck_assert(poisoned(z, sizeof z) && poisoned(g, sizeof g));
}
END_TEST

static const double bad_frequencies[] = {0, -1e9, NAN, INFINITY, 999, 1.001e12};

START_TEST(bad_frequency_names_its_place)
{
    lstub_dielectric d = dielectric(3, 0);
    lstub_conductor c = copper(0, 0, 0);
    lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, 1e-4, 1e-5, 1e-4, 1e-4, &d);
    double f[3] = {1e9, bad_frequencies[_i], 1e9}, z[6];
    memset(z, POISON, sizeof z);
    assert_refused(lstub_trace_line(&x, f, 3, z, NULL, &err), LSTUB_E_ARGUMENT, err, "item 1|freq = |Hz");
    ck_assert_int_eq(err.index, 1);
    assert_refused(lstub_conductor_surface_impedance(&c, f, 3, z, &err), LSTUB_E_ARGUMENT, err, "item 1|freq = |Hz");
    ck_assert_int_eq(err.index, 1);
    assert_refused(lstub_skin_depth(5.8e7, f[1], z, &err), LSTUB_E_ARGUMENT, err, "f = |Hz");
    ck_assert(poisoned(z, sizeof z));
}
END_TEST

START_TEST(null_pointers)
{
    lstub_dielectric d = dielectric(3, 0);
    lstub_conductor c = copper(0, 0, 0);
    lstub_trace x = trace(LSTUB_TRACE_STRIPLINE, 1e-4, 1e-5, 1e-4, 1e-4, &d);
    double f = 1e9, z[2];
    assert_refused(lstub_trace_line(NULL, &f, 1, z, z, &err), LSTUB_E_NULL, err, "trace");
    assert_refused(lstub_trace_line(&x, NULL, 1, z, z, &err), LSTUB_E_NULL, err, "freq");
    assert_refused(lstub_conductor_surface_impedance(NULL, &f, 1, z, &err), LSTUB_E_NULL, err, "conductor");
    assert_refused(lstub_conductor_surface_impedance(&c, NULL, 1, z, &err), LSTUB_E_NULL, err, "freq");
    assert_refused(lstub_conductor_surface_impedance(&c, &f, 1, NULL, &err), LSTUB_E_NULL, err, "z");
    assert_refused(lstub_skin_depth(5.8e7, f, NULL, &err), LSTUB_E_NULL, err, "depth");
    assert_refused(lstub_skin_depth(0, f, z, &err), LSTUB_E_ARGUMENT, err, "conductivity = 0 S/m");
    ck_assert_int_eq(lstub_trace_line(&x, &f, 1, NULL, NULL, NULL), LSTUB_OK);
}
END_TEST

static const struct {
    int32_t     kind;
    double      w, t, h1, h2, dk, dk_above, loss, f;
    const char *words;
} beyond[] = {
    {0, 5e-6, 0, 1e-4, 0, 4, 0, 0, 1e9, "width/height = 0.05|0.1"},
    {0, 5e-6, 1e-5, 1e-5, 0, 4, 0, 0, 1e9, "thickness/width = 2"},
    {0, 1e-4, 5e-5, 2e-5, 0, 4, 0, 0, 1e9, "thickness/height = 2.5"},
    {0, 1e-4, 0, 1e-4, 0, 30, 0, 0, 1e9, "Dk below over above = 30|20"},
    {0, 1e-3, 0, 1e-3, 0, 4, 0, 0, 4e10, "freq = 4e+10 Hz|2.99792e+10|tenth"},
    {1, 1e-5, 2e-5, 1e-4, 1e-4, 4, 0, 0, 1e9, "thickness/width = 2"},
    {1, 1e-4, 2e-5, 1e-5, 1e-4, 4, 0, 0, 1e9, "thickness/height = 2"},
    {1, 1e-4, 2e-5, 1e-4, 1e-4, 4, 1.5, 0, 1e9, "Dk below over above = 2.66667|0.5 to 2"},
    {1, 1e-3, 0, 1e-3, 1e-3, 4, 0, 0, 4e10, "freq = 4e+10 Hz|waveguide mode"},
    {1, 1e-4, 0, 1e-4, 1e-4, 3.6, 0, 0.3, 1e11, "freq = 1e+11 Hz|below 1"},
};

START_TEST(outside_the_stated_range)
{
    lstub_dielectric d = dielectric(beyond[_i].dk, beyond[_i].loss), above = dielectric(beyond[_i].dk_above, 0);
    lstub_trace x = trace(beyond[_i].kind, beyond[_i].w, beyond[_i].t, beyond[_i].h1, beyond[_i].h2, &d);
    double z[2] = {NAN, NAN}, g[2] = {NAN, NAN};
    if (beyond[_i].dk_above > 0)
        x.dielectric_above = &above;
    assert_refused(lstub_trace_line(&x, &beyond[_i].f, 1, z, g, &err), LSTUB_W_RANGE, err, beyond[_i].words);
    ck_assert(isfinite(z[0]) && isfinite(z[1]) && isfinite(g[0]) && isfinite(g[1]));
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("trace");
    TCase *metal = tcase_create("conductor"), *strip = tcase_create("stripline"), *micro = tcase_create("microstrip"),
          *loss = tcase_create("loss"), *use = tcase_create("use");
    TCase *cases[5] = {metal, strip, micro, loss, use};
    for (int i = 0; i < 5; i++) {
        tcase_add_checked_fixture(cases[i], setup, NULL);
        tcase_set_timeout(cases[i], 60);
        suite_add_tcase(suite, cases[i]);
    }
    tcase_add_loop_test(metal, skin_depth, 0, (int)COUNT(skin));
    tcase_add_loop_test(metal, roughness_factor, 0, (int)COUNT(factors));
    tcase_add_test(metal, roughness_real_part);
    tcase_add_test(metal, smooth_copper);
    tcase_add_loop_test(metal, roughness_is_causal, 0, 2);
    tcase_add_loop_test(strip, thin_stripline_in_the_middle, 0, (int)COUNT(cohn));
    tcase_add_test(strip, thin_stripline_duality);
    tcase_add_loop_test(strip, thin_stripline_at_any_height, 0, (int)COUNT(spectral));
    tcase_add_test(strip, stripline_without_its_upper_plane);
    tcase_add_loop_test(strip, striplines_of_the_reference_runs, 0, (int)COUNT(grid));
    tcase_add_loop_test(strip, thick_strips, 0, (int)COUNT(thick));
    tcase_add_loop_test(loss, trace_is_causal, 0, 4);
    tcase_add_loop_test(micro, thin_microstrip, 0, (int)COUNT(static_microstrip));
    tcase_add_loop_test(micro, microstrip_dispersion, 0, (int)COUNT(dispersive));
    tcase_add_test(micro, microstrip_without_dispersion);
    tcase_add_test(micro, one_dielectric);
    tcase_add_test(micro, dielectric_above_scales);
    tcase_add_test(micro, anisotropy);
    tcase_add_test(loss, textbook_stripline_loss);
    tcase_add_test(loss, direct_current_resistance);
    tcase_add_test(loss, rough_trace);
    tcase_add_test(loss, sheet);
    tcase_add_test(loss, passive_everywhere);
    tcase_add_test(use, arrays_are_items_side_by_side);
    tcase_add_test(use, older_conductor);
    tcase_add_loop_test(use, bad_traces, 0, (int)COUNT(misuses));
    tcase_add_loop_test(use, bad_frequency_names_its_place, 0, (int)COUNT(bad_frequencies));
    tcase_add_test(use, null_pointers);
    tcase_add_loop_test(use, outside_the_stated_range, 0, (int)COUNT(beyond));
    return test_main(suite);
}
