/* The cavity model: exact limits, smoothness, what it refuses, memory. White-box where a limit is no board. */
#include "check_model.h"
#include "model/cavity_model.h"
#include "num/bessel.h"

/* ---- exact limits -------------------------------------------------------------------------------- */

/* Antipads as wide as the wall: a coaxial line; one more cavity is one more piece of it. */
START_TEST(coaxial_line)
{
    test_board b;
    int32_t connects[][2] = {{0, 2}, {0, 4}};
    board_layers(&b, "PPPPPPPPPPPP", 0.2e-3, 35e-6);
    assert_ok(board_create(&b, NULL, &err), err);
    for (double f = 1e9; f < 100e9; f *= 1.37) {
        complex_value z[2];
        double eps[2];
        for (int i = 0; i < 2; i++) {
            lstub_on_layer open[2] = {{0, 0, 0.75e-3}, {connects[i][1], 0, 0.75e-3}};
            lstub_via via = board_via(connects[i], 2);
            via.return_kind = LSTUB_RETURN_WALL;
            via.return_distance = 0.375e-3;
            via.pad_start = via.pad_inner = via.pad_end = 0;
            via.antipads = open;
            via.antipad_count = 2;
            lstub_model *model = model_on(b.stackup, &via, LSTUB_FIDELITY_CAVITY);
            z[i] = zin_of(model, 0, f);
            lstub_model_destroy(model);
        }
        assert_ok(lstub_dielectric_permittivity(&b.dielectric, &f, 1, eps, NULL, &err), err);
        cplx root = cplx_sqrt(cplx_of(eps[0], eps[1])), t = cplx_tanh(cplx_mul(cplx_of(0, 2 * PI * f * 235e-6 / C0), root));
        cplx zc = cplx_scale(cplx_inv(root), MU0 * C0 / (2 * PI) * log(3.0)), load = cplx_of(z[1].re, z[1].im);
        cplx want = cplx_mul(zc, cplx_div(cplx_fma(load, zc, t), cplx_fma(zc, load, t)));
        double size = cplx_abs(want) + cplx_abs(zc);
        assert_close(z[0].re, want.re, 0, 1e-9 * size, "coaxial line in front of the rest, textbook");
        assert_close(z[0].im, want.im, 0, 1e-9 * size, "coaxial line in front of the rest, textbook");
    }
    lstub_stackup_destroy(b.stackup);
}
END_TEST

/* Impedance of a plate pair between radius a and a wall at R, no loss: current in the barrel, the same at every height. */
static double radial_guide(double f, double dk, double h, double a, double wall)
{
    double k = 2 * PI * f * sqrt(dk) / C0;
    lstub__jy in, out;
    lstub__bessel_jy(k * a, &in);
    lstub__bessel_jy(k * wall, &out);
    return 2 * PI * f * MU0 * h / (2 * PI * k * a) * (in.j0 * out.y0 - in.y0 * out.j0) / (in.j1 * out.y0 - in.y1 * out.j0);
}

static void *plain_allocate(void *user, size_t bytes) { (void)user; return malloc(bytes); }
static void plain_release(void *user, void *memory) { (void)user; free(memory); }

/*
** A flat cavity and a barrel that carries nearly all its charge below it, in a narrow gap 10 mm long: the current through the
** cavity is the same at every height, and moving the wall, some wavelengths away, changes Zin by the radial guide alone.
** Fringes of the gap and the cavity hold 5e-5 of the charge. Walls within 0.75 wavelengths only.
*/
START_TEST(radial_guide_of_one_cavity)
{
    static const lstub__cav_copper copper[2] = {{1e-3, 51e-6, 0, 0, 0}, {10e-3, 51e-6, 0, 0, 0}};
    static const lstub__cav_layer layer[1] = {{1e-6, 0}};
    static const lstub__cav_medium medium[2] = {{3.6, 1.0}, {1.0, 1.0}};
    static const double wall[] = {0.05, 0.3, 0.7, 1.6};
    cplx eps[2] = {{3.6, 0}, {1, 0}};
    for (double f = 2e7; f < 8e7; f *= 1.3) {
        double z[4];
        for (int i = 0; i < 4; i++) {
            lstub__cav_barrel barrel;
            lstub__cavity *cavity = NULL;
            memset(&barrel, 0, sizeof barrel);
            barrel.radius = 50e-6;
            barrel.copper = copper, barrel.layer = layer, barrel.layers = 1;
            barrel.media = 2, barrel.medium = medium, barrel.below_medium = 1;
            barrel.outer = LSTUB__CAV_WALL, barrel.wall = wall[i];
            ck_assert_int_eq(lstub__cavity_compile(&barrel, NULL, plain_allocate, plain_release, NULL, &cavity), 0);
            z[i] = lstub__cavity_zin(cavity, f, eps).im;
            lstub__cavity_destroy(cavity);
        }
        for (int i = 1; i < 4; i++)
            assert_close(z[i] - z[0], radial_guide(f, 3.6, 1e-6, 50e-6, wall[i]) - radial_guide(f, 3.6, 1e-6, 50e-6, wall[0]), 1e-4, 0,
                         "radial line, textbook");
    }
}
END_TEST

static cplx k0_of(cplx kappa, double x)
{
    cplx i0, k0;
    lstub__bessel_zik0(cplx_scale(kappa, x), &i0, &k0);
    return k0;
}

/* What a barrel feels of its returns: E at its rim over the current, in units of K0. */
static cplx ring_wave(const lstub__cav_returns *returns, cplx kappa, double a)
{
    cplx i0, k0;
    cav_echo echo;
    cav_ring(returns, cav_joining(returns, 0.0, 1e-3), 1, a, kappa, 0, &echo);
    lstub__bessel_zik0(cplx_scale(kappa, a), &i0, &k0);
    return cplx_fma(k0, echo.gamma[0], i0);
}

/* Thin barrels far apart in odd mode: line dipoles on the barrels, counted with the axial flux alone, are (a/s)^2. */
START_TEST(two_thin_barrels)
{
    const double s = 1e-3;
    lstub__cav_returns odd;
    memset(&odd, 0, sizeof odd);
    odd.pitch = s;
    odd.sign = -1.0;
    assert_close(ring_wave(&odd, cplx_of(0, 2 * PI * 1e3 / C0), 1e-6).re, acosh(s / 2e-6), 1e-6, 0, "two-wire line, textbook");
    odd.flux = 1;                   /* with dipoles: near barrels too, but for the next order, (a/s)^4 */
    odd.opening = odd.height = 1e-3;
    assert_close(ring_wave(&odd, cplx_of(0, 2 * PI * 1e3 / C0), 0.1e-3).re, acosh(5.0), 1e-4, 0, "two-wire line, textbook");
}
END_TEST

/* Thin return vias carry line currents: each as much as makes E vanish on it. */
START_TEST(thin_return_vias)
{
    const double r = 0.2e-6, s = 1e-3;
    cplx kappa = cplx_of(8.0, 2 * PI * 20e9 / C0 * sqrt(3.6));
    for (int m = 1; m <= 8; m++) {
        lstub__cav_via via[8];
        lstub__cav_returns even, listed;
        cplx own = k0_of(kappa, r), there = k0_of(kappa, s), want, got[2];
        memset(via, 0, sizeof via);
        memset(&even, 0, sizeof even);
        even.via = via;
        listed = even;
        even.vias = 1;
        even.even = listed.vias = m;
        for (int i = 0; i < m; i++) {
            via[i].x = s * cos(2 * PI * i / m);
            via[i].y = s * sin(2 * PI * i / m);
            via[i].radius = r;
            if (i > 0)
                own = cplx_add(own, k0_of(kappa, 2 * s * sin(PI * i / m)));
        }
        want = cplx_sub(k0_of(kappa, r), cplx_scale(cplx_div(cplx_mul(there, there), own), m));
        got[0] = ring_wave(&even, kappa, r);
        got[1] = ring_wave(&listed, kappa, r);
        for (int i = 0; i < 2; i++) {
            assert_close(got[i].re, want.re, 0, 1e-6, "line currents, derived");
            assert_close(got[i].im, want.im, 0, 1e-6, "line currents, derived");
        }
        for (int i = 0; i < m; i++)
            via[i].radius = 0.1e-3;
        got[0] = ring_wave(&even, kappa, 1e-4);
        got[1] = ring_wave(&listed, kappa, 1e-4);
        if (m <= 4) {
            assert_close(got[0].re, got[1].re, 0, 1e-11, "identity: the same vias");
            assert_close(got[0].im, got[1].im, 0, 1e-11, "identity: the same vias");
        }
    }
}
END_TEST

/* Half the size at twice the frequency. */
START_TEST(scale)
{
    test_board small;
    teardown();
    board_layers(&board, "SPSPSPPS", 0.2e-3, 35e-6);
    board.dielectric.loss_tangent = 0;
    assert_ok(board_create(&board, NULL, &err), err);
    board_layers(&small, "SPSPSPPS", 0.1e-3, 0.5 * 35e-6);
    small.dielectric.loss_tangent = 0;
    assert_ok(board_create(&small, NULL, &err), err);
    for (uint64_t i = 0; i < 6; i++) {
        int32_t connects[2];
        lstub_via via = random_via(2, i, connects), half = via;
        half.drill /= 2, half.antipad /= 2, half.return_distance /= 2;
        half.pad_start /= 2, half.pad_inner /= 2, half.pad_end /= 2;
        lstub_model *a = model_on(board.stackup, &via, 0), *b = model_on(small.stackup, &half, 0);
        for (int32_t s = 0; s < lstub_model_stub_count(a); s++)
            for (double f = 1e8; f < 50e9; f *= 2.1) {
                complex_value x = zin_of(a, s, f), y = zin_of(b, s, 2 * f);
                double size = hypot(x.re, x.im) + 1;
                assert_close(x.re, y.re, 0, 1e-12 * size, "identity: scale");
                assert_close(x.im, y.im, 0, 1e-12 * size, "identity: scale");
            }
        lstub_model_destroy(a);
        lstub_model_destroy(b);
    }
    lstub_stackup_destroy(small.stackup);
}
END_TEST

static lstub_via shielded(const int32_t *connects)
{
    lstub_via via = board_via(connects, 2);
    via.return_kind = LSTUB_RETURN_WALL;
    via.lid_distance = 0.3e-3;
    return via;
}

START_TEST(lossless_is_lossless)
{
    lstub_via via = shielded(to_c1);
    lstub_model *model = model_on(board.stackup, &via, 0);
    for (double f = 1e7; f < 110e9; f *= 1.07) {
        double s21[2];
        ck_assert_int_ge(lstub_model_s21(model, 0, &f, 1, s21, NULL, &err), 0);
        assert_close(s21[0] * s21[0] + s21[1] * s21[1] + (s21[0] - 1) * (s21[0] - 1) + s21[1] * s21[1], 1, 0, 1e-12, "identity: no loss; a shunt");
    }
    lstub_model_destroy(model);
}
END_TEST

/* ---- finite, passive, smooth --------------------------------------------------------------------- */

static void assert_passive(const lstub_stackup *stackup, const lstub_via *via)
{
    lstub_model *model = model_on(stackup, via, 0);
    for (int32_t s = 0; s < lstub_model_stub_count(model); s++)
        for (double f = 1e7; f < 110e9; f *= 1.5) {
            complex_value z = zin_of(model, s, f);
            ck_assert_msg(isfinite(z.re) && isfinite(z.im) && z.re >= -1e-12 * (1 + fabs(z.im)), "Zin = %g %g ohm at %g Hz", z.re, z.im, f);
        }
    lstub_model_destroy(model);
}

START_TEST(many_layers_and_none)
{
    test_board many, few;
    char kinds[61];
    int32_t connects[2] = {0, 2};
    for (int i = 0; i < 60; i++)
        kinds[i] = i % 3 == 1 ? 'P' : 'S';
    kinds[60] = '\0';
    board_make(&many, kinds, 0.1e-3, 17e-6);
    lstub_via via = board_via(connects, 2);
    assert_passive(many.stackup, &via);
    via.nonfunctional_pads = LSTUB_PADS_KEPT;
    assert_passive(many.stackup, &via);
    lstub_stackup_destroy(many.stackup);
    board_make(&few, "SPSSSSSSSSSSSSSSS", 0.1e-3, 17e-6);      /* 14 signal layers on end, no plane */
    connects[1] = 4;
    assert_passive(few.stackup, &via);
    via.return_kind = LSTUB_RETURN_NONE;
    assert_passive(few.stackup, &via);
    lstub_stackup_destroy(few.stackup);
    for (uint64_t i = 0; i < 12; i++) {
        via = random_via(8, i, connects);
        assert_passive(board.stackup, &via);
    }
}
END_TEST

static complex_value zin_drilled(double depth, double f)
{
    lstub_backdrill drill = {LSTUB_SIDE_BOTTOM, 0, depth, 0.4e-3};
    lstub_via via = board_via(to_c1, 2);
    via.backdrills = &drill;
    via.backdrill_count = 1;
    lstub_model *model = model_on(board.stackup, &via, 0);
    complex_value z = zin_of(model, 0, f);
    lstub_model_destroy(model);
    return z;
}

/* Barrel end moved through copper layer C5, a plane, from 5 um below it to 5 um above: every step as large as its neighbours. */
START_TEST(end_through_a_plane)
{
    double faces[2] = {8 * 35e-6 + 7 * 200e-6 - 5 * 235e-6 - 35e-6, 8 * 35e-6 + 7 * 200e-6 - 5 * 235e-6};   /* from the bottom */
    for (int i = 0; i < 2; i++) {
        double d = 1e-10, at = faces[i];
        double z0 = zin_drilled(at - 2 * d, 20e9).im, z1 = zin_drilled(at - d, 20e9).im, z2 = zin_drilled(at + d, 20e9).im;
        double z3 = zin_drilled(at + 2 * d, 20e9).im;
        ck_assert_msg(fabs(z2 - z1) < 1e-6 * fabs(z1) + 3 * (fabs(z1 - z0) + fabs(z3 - z2)), "face %d: jump from %.12g to %.12g ohm (%.12g %.12g)", i,
                      z1, z2, z0, z3);
        for (double off = -5e-6; off < 5.5e-6; off += 1e-6)
            ck_assert(isfinite(zin_drilled(at + off, 20e9).im));
    }
}
END_TEST

static double zin_with(double antipad_c3, double pad_end, double t)
{
    test_board b;
    lstub_on_layer other = {6, 0, antipad_c3};
    lstub_via via = board_via(to_c1, 2);
    board_layers(&b, "SPSPSPPS", 0.2e-3, t);
    assert_ok(board_create(&b, NULL, &err), err);
    via.pad_end = pad_end;
    via.antipads = &other;
    via.antipad_count = 1;
    lstub_model *model = model_on(b.stackup, &via, 0);
    double z = zin_of(model, 0, 20e9).im;
    lstub_model_destroy(model);
    lstub_stackup_destroy(b.stackup);
    return z;
}

/* Two sides of a special value, 1e-10 m apart: no more than 1e-6 apart, and the slopes are of one size. */
static void assert_smooth(const char *what, double below, double at, double above)
{
    double room = 1e-6 * fabs(at);
    ck_assert_msg(fabs(at - below) < room && fabs(above - at) < room, "%s: %.12g, %.12g, %.12g ohm", what, below, at, above);
}

START_TEST(special_values)
{
    const double d = 1e-10, s = 0.75e-3;
    assert_smooth("antipads alike", zin_with(s - d, 0.5e-3, 35e-6), zin_with(s, 0.5e-3, 35e-6), zin_with(s + d, 0.5e-3, 35e-6));
    double one = zin_with(s + 1e-6, 0.5e-3, 35e-6), two = zin_with(s + 2e-6, 0.5e-3, 35e-6), none = zin_with(s, 0.5e-3, 35e-6);
    ck_assert_msg(fabs((two - one) - (one - none)) < 0.05 * fabs(one - none), "antipads 0, 1, 2 um apart: %.12g %.12g %.12g", none, one, two);
    assert_smooth("pad as wide as the drill", zin_with(s, 0, 35e-6), zin_with(s, 0.25e-3, 35e-6), zin_with(s, 0.25e-3 + d, 35e-6));
}
END_TEST

/* ---- notches ------------------------------------------------------------------------------------- */

/* The search misses none that a scan of |S21| sees. */
START_TEST(notches_against_a_scan)
{
    enum { STEPS = 2000 };
    for (uint64_t i = 0; i < 6; i++) {
        int32_t connects[2];
        lstub_via via = random_via(9, i, connects);
        lstub_model *model = model_on(board.stackup, &via, 0);
        for (int32_t s = 0; s < lstub_model_stub_count(model); s++) {
            lstub_notch notch[16];
            size_t n = notches_of(model, s, 110e9, notch, COUNT(notch)), seen = 0;
            double f[3] = {0, 0, 0}, loss[3] = {0, 0, 0};
            for (int k = 0; k < STEPS; k++) {
                f[0] = f[1], f[1] = f[2], loss[0] = loss[1], loss[1] = loss[2];
                f[2] = 1e9 + 109e9 * k / (STEPS - 1);
                loss[2] = loss_of(model, s, f[2]);
                if (k < 2 || !(loss[1] > loss[0] && loss[1] >= loss[2]))
                    continue;
                ck_assert_msg(seen < n && fabs(notch[seen].f - f[1]) < 109e9 / STEPS, "via %d: |S21| has a minimum at %g Hz", (int)i, f[1]);
                ck_assert(notch[seen].error > 0 && notch[seen].error < 0.1 && notch[seen].depth_db <= -loss[1] + 1e-6);
                seen++;
            }
            ck_assert_msg(seen == n || notch[n - 1].f > 109.9e9, "via %d: %zu notches, %zu minima", (int)i, n, seen);
        }
        lstub_model_destroy(model);
    }
}
END_TEST

/* ---- batch, memory, input ------------------------------------------------------------------------ */

START_TEST(batch_is_single)
{
    enum { N = 6 };
    lstub_via vias[N];
    int32_t connects[N][2], status[N];
    double f1[N], dk[N], length[N];
    for (uint64_t i = 0; i < N; i++)
        vias[i] = random_via(6, i, connects[i]);
    vias[4] = vias[1];
    ck_assert_int_ge(lstub_first_notch_batch(board.stackup, vias, N, sizeof vias[0], NULL, f1, dk, length, status, &err), 0);
    for (int i = 0; i < N; i++) {
        double alone = first_notch(board.stackup, &vias[i], 0);
        ck_assert_msg(alone == f1[i] || (isnan(alone) && isnan(f1[i])), "via %d: %.17g in a batch, %.17g alone", i, f1[i], alone);
    }
    ck_assert(f1[4] == f1[1] && dk[4] == dk[1] && length[4] == length[1]);
    lstub_model *model = model_on(board.stackup, &vias[0], 0);
    double f[40], many[80], one[2];
    for (int i = 0; i < 40; i++)
        f[i] = 2.3e9 * (i + 1);
    ck_assert_int_ge(lstub_model_zin(model, 0, f, 40, many, NULL, &err), 0);
    for (int i = 39; i >= 0; i--) {
        ck_assert_int_ge(lstub_model_zin(model, 0, &f[i], 1, one, NULL, &err), 0);
        ck_assert(one[0] == many[2 * i] && one[1] == many[2 * i + 1]);
    }
    lstub_model_destroy(model);
}
END_TEST

typedef struct weigher {
    size_t alive, calls;
} weigher;

static void *weigh(void *user, size_t bytes)
{
    weigher *w = user;
    size_t  *block = malloc(bytes + 2 * sizeof(size_t));
    w->calls++;
    if (block == NULL)
        return NULL;
    *block = bytes;
    w->alive += bytes;
    return block + 2;
}

static void unweigh(void *user, void *memory)
{
    if (memory == NULL)
        return;
    ((weigher *)user)->alive -= ((size_t *)memory)[-2];
    free((size_t *)memory - 2);
}

/* Ten cavities: what is left after compilation; nothing is taken while it answers. */
START_TEST(compiled_size)
{
    test_board ten;
    weigher w = {0, 0};
    lstub_allocator a;
    lstub_model *model = NULL;
    lstub_via via = board_via(to_c1, 2);
    LSTUB_INIT(a);
    a.allocate = weigh, a.release = unweigh, a.user = &w;
    board_make(&ten, "SPPPPPPPPPPPS", 0.2e-3, 35e-6);
    assert_ok(lstub_model_create(ten.stackup, &via, NULL, &a, &model, &err), err);
    printf("model of ten cavities: %zu bytes\n", w.alive);
    ck_assert_msg(w.alive < 64 * 1024, "%zu bytes", w.alive);
    w.calls = 0;
    zin_of(model, 0, 20e9);
    loss_of(model, LSTUB_ALL_STUBS, 20e9);
    lstub_notch notch[4];
    notches_of(model, 0, 60e9, notch, 4);
    line_of(model, 0);
    ck_assert_uint_eq(w.calls, 0);
    lstub_model_destroy(model);
    ck_assert_uint_eq(w.alive, 0);
    lstub_stackup_destroy(ten.stackup);
}
END_TEST

static void pad_over_antipad(lstub_via *v) { v->pad_inner = 0.8e-3, v->nonfunctional_pads = LSTUB_PADS_KEPT; }
static void drill_over_antipad(lstub_via *v) { v->antipad = 0.2e-3; }
static void wall_in_antipad(lstub_via *v) { v->return_kind = LSTUB_RETURN_WALL, v->return_distance = 0.3e-3; }
static void returns_touch(lstub_via *v) { v->return_count = 40; }
static const double xy_nan[] = {1e-3, 0, NAN, 1e-3}, xy_touch[] = {1e-3, 0, 1.1e-3, 0}, xy_in_barrel[] = {1e-3, 0, 0, 0.2e-3};
static void places_nan(lstub_via *v) { v->return_count = 2, v->return_xy = xy_nan; }
static void places_touch(lstub_via *v) { v->return_count = 2, v->return_xy = xy_touch; }
static void place_in_barrel(lstub_via *v) { v->return_count = 2, v->return_xy = xy_in_barrel; }
static void outside_low(lstub_via *v) { v->outside_dk = 0.5; }
static void hole_nan(lstub_via *v) { v->hole_dk = NAN; }
static void lid_negative(lstub_via *v) { v->lid_distance = -1e-3; }

static const struct bad {
    void (*spoil)(lstub_via *via);
    int32_t status;
    const char *words;
} bad[] = {
    {pad_over_antipad, LSTUB_E_GEOMETRY, "layer 6 'C3'|pad = 0.0008 m|0.00075 m"},
    {drill_over_antipad, LSTUB_E_GEOMETRY, "layer 6 'C3'|antipad = 0.0002 m|drill"},
    {wall_in_antipad, LSTUB_E_GEOMETRY, "layer 6 'C3'|return_distance = 0.0003 m|0.00075 m"},
    {returns_touch, LSTUB_E_GEOMETRY, "40|0.00025 m|touch"},
    {places_nan, LSTUB_E_ARGUMENT, "return_xy|nan"},
    {places_touch, LSTUB_E_GEOMETRY, "return_xy|touch"},
    {place_in_barrel, LSTUB_E_GEOMETRY, "return_xy|barrel"},
    {outside_low, LSTUB_E_ARGUMENT, "outside_dk = 0.5"},
    {hole_nan, LSTUB_E_ARGUMENT, "hole_dk = nan"},
    {lid_negative, LSTUB_E_ARGUMENT, "lid_distance = -0.001 m"},
};

START_TEST(bad_geometry)
{
    lstub_via via = board_via(to_c1, 2);
    lstub_model *model = NULL;
    bad[_i].spoil(&via);
    assert_refused(lstub_model_create(board.stackup, &via, NULL, NULL, &model, &err), bad[_i].status, err, bad[_i].words);
    ck_assert_ptr_null(model);
}
END_TEST

START_TEST(bad_questions)
{
    static const double f[] = {0, -1e9, 201e9, NAN, INFINITY};
    static const int32_t annuli[] = {-1, 1, 13};
    lstub_via via = board_via(to_c1, 2);
    lstub_model *model = model_on(board.stackup, &via, 0), *none = NULL;
    double z[2];
    for (size_t i = 0; i < COUNT(f); i++) {
        assert_refused(lstub_model_zin(model, 0, &f[i], 1, z, NULL, &err), LSTUB_E_ARGUMENT, err, "item 0|freq = |Hz");
        ck_assert(isnan(z[0]) && isnan(z[1]));
    }
    for (size_t i = 0; i < COUNT(annuli); i++) {
        lstub_model_options o = options(0);
        o.annuli = annuli[i];
        assert_refused(lstub_model_create(board.stackup, &via, &o, NULL, &none, &err), LSTUB_E_ARGUMENT, err, "annuli = |12");
    }
    lstub_model_destroy(model);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("cavity");
    TCase *exact = tcase_create("limits"), *lossy = tcase_create("lossy"), *input = tcase_create("input");
    tcase_add_checked_fixture(exact, setup_lossless, teardown);
    tcase_add_checked_fixture(lossy, setup, teardown);
    tcase_add_checked_fixture(input, setup, teardown);
    tcase_set_timeout(exact, 120);
    tcase_set_timeout(lossy, 120);
    tcase_add_test(exact, coaxial_line);
    tcase_add_test(exact, radial_guide_of_one_cavity);
    tcase_add_test(exact, two_thin_barrels);
    tcase_add_test(exact, thin_return_vias);
    tcase_add_test(exact, scale);
    tcase_add_test(exact, lossless_is_lossless);
    tcase_add_test(lossy, many_layers_and_none);
    tcase_add_test(lossy, end_through_a_plane);
    tcase_add_test(lossy, special_values);
    tcase_add_test(lossy, notches_against_a_scan);
    tcase_add_test(lossy, batch_is_single);
    tcase_add_test(input, compiled_size);
    tcase_add_loop_test(input, bad_geometry, 0, (int)COUNT(bad));
    tcase_add_test(input, bad_questions);
    suite_add_tcase(suite, exact);
    suite_add_tcase(suite, lossy);
    suite_add_tcase(suite, input);
    return test_main(suite);
}
