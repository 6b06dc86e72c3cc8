/* A whole via as a network: three-dimensional runs, reciprocity and energy, stubs and drills, ports, limits, scale. */
#include "check_transition.h"

#include <complex.h>

/* ---- three-dimensional runs ---------------------------------------------------------------------- */

#define RUNS "finite-difference runs made for this project, tests/data/fdtd3d: f1 of exact round rims; S of the staircased ones, whose " \
             "frequencies go by f1/f1_raw"

typedef struct run {
    const char *id;
    int    trace_at;            /* the trace lies in this cavity, from 0; nine of 0.2 mm                       */
    int    vias, pair, removed;
    double drilled, line, depth;
    double f1, f1_raw, allowed; /* relative, the run's own uncertainty included; f1 0: no stub                 */
    struct { double f, s11[2], s21[2]; } at[3];
} run;

static const run runs[] = {
    {"s_k4", 3, 4, 0, 0, 0.0, 48.792, -30.134, 22.0235e9, 22.1584e9, 0.006,
     {{5e9, {-0.09649, -0.12835}, {0.72802, -0.65363}}, {10e9, {-0.32092, -0.14371}, {0.05974, -0.92287}}, {15e9, {-0.59767, 0.16119}, {-0.56356, -0.51465}}}},
    {"iso_k4", 3, 0, 0, 0, 0.0, 48.803, -8.872, 20.3068e9, 20.5480e9, 0.007,
     {{5e9, {-0.03618, -0.04733}, {0.62887, -0.66476}}, {10e9, {-0.14433, 0.00764}, {-0.03268, -0.75269}}, {14e9, {-0.12518, 0.15684}, {-0.29981, -0.45365}}}},
    {"d_k5", 4, 1, LSTUB_PAIR_SEPARATE, 0, 0.0, 48.799, -28.959, 27.8646e9, 28.0263e9, 0.009,
     {{5e9, {-0.08943, -0.11510}, {0.72443, -0.66077}}, {12e9, {-0.35755, -0.07336}, {-0.22043, -0.89371}}, {19e9, {-0.47034, 0.43954}, {-0.73257, -0.09473}}}},
    {"do_k5", 4, 1, LSTUB_PAIR_SHARED, 0, 0.0, 48.799, -28.221, 28.5300e9, 28.5916e9, 0.009,
     {{5e9, {-0.07954, -0.10279}, {0.73209, -0.65593}}, {12e9, {-0.32159, -0.07720}, {-0.20577, -0.91046}}, {19e9, {-0.46503, 0.38687}, {-0.76230, -0.11974}}}},
    {"n_k4", 3, 4, 0, 1, 0.0, 48.797, 0.0, 0.0, 0.0, 0.0,
     {{5e9, {-0.01773, -0.00334}, {0.82906, -0.54685}}, {15e9, {-0.02229, -0.00958}, {-0.18361, -0.97437}}, {26.5e9, {-0.04900, 0.00864}, {-0.98307, 0.00217}}}},
    {"bd_k4", 3, 4, 0, 0, 0.95e-3, 48.796, 0.0, 0.0, 0.0, 0.0,
     {{5e9, {-0.02422, -0.01796}, {0.82125, -0.55815}}, {15e9, {-0.07063, -0.02557}, {-0.22721, -0.96238}}, {26.5e9, {-0.12622, 0.07802}, {-0.96648, 0.09406}}}},
};

/* Planes without thickness 0.2 mm apart, a trace in the middle of one space, the bottom 0.1 mm below the last plane. */
static void stage_run(stage *g, const run *r)
{
    char kinds[13] = "PPPPPPPPPPPS";
    double h[11] = {0.0};
    int n = r->trace_at + 1;
    kinds[n] = 'S';
    stage_begin(g, kinds, 0.2e-3, 0.0, 0.005);
    for (int i = 0; i < 11; i++)
        h[i] = i == n - 1 || i == n || i == 10 ? 0.1e-3 : 0.2e-3;
    stage_layers(g, h);
    coax(g)->dk = 1.524456;
    lstub_port *p = trace(g, n);
    p->impedance = p->z_ref = r->line;
    p->width = 0.113e-3;
    p->distance = 2e-3;
    for (int i = 0; i < r->vias && r->pair == 0; i++)
        stage_place(g, i & 1 ? 0.65e-3 : -0.65e-3, i & 2 ? 0.65e-3 : -0.65e-3, 0, 10);
    if (r->pair) {
        stage_pair(g, r->pair, 0.9e-3);
        stage_place(g, -0.9e-3, 0.0, 0, 10);
        stage_place(g, 1.8e-3, 0.0, 0, 10);
    }
    if (r->drilled > 0.0) {
        stage_drill(g, LSTUB_SIDE_BOTTOM, r->drilled);
        g->drills[0].diameter = 0.45e-3;
    }
    g->options.stubs = r->removed ? LSTUB_STUBS_REMOVED : LSTUB_STUBS_KEPT;
}

START_TEST(three_dimensional_runs)
{
    const run *r = &runs[_i];
    stage g;
    stage_run(&g, r);
    lstub_transition *t = stage_make(&g);
    int p = lstub_transition_ports(t);
    ck_assert_int_eq(p, r->pair ? 4 : 2);
    if (r->f1 > 0.0) {
        lstub_notch notch[2];
        size_t count = 0;
        LSTUB_INIT(notch[0]);
        LSTUB_INIT(notch[1]);
        ck_assert_int_ge(lstub_transition_notches(t, r->pair ? LSTUB_MODE_ODD : LSTUB_MODE_SINGLE, 1, 0, 60e9, notch, 2, sizeof notch[0], &count, &err), 0);
        ck_assert_uint_ge(count, 1);
        assert_close(notch[0].f, r->f1, r->allowed, 0.0, RUNS);
        assert_close(notch[0].depth_db, r->depth, 0.0, 2.0, RUNS);
        ck_assert_int_eq(notch[0].stub, -1);
    }
    for (int k = 0; k < 3; k++) {
        double s[32], f = r->at[k].f * (r->f1 > 0.0 ? r->f1/r->f1_raw : 1.0), odd[4];
        s_at(t, f, s);
        for (int i = 0; i < 2; i++)
            for (int c = 0; c < 2; c++)                 /* column 0 of the odd mode: own less the partner's */
                odd[2 * i + c] = s[2 * i * p + c] - (r->pair ? s[2 * (i * p + 2) + c] : 0.0);
        assert_close(20.0 * log10(hypot(odd[2], odd[3])), 20.0 * log10(hypot(r->at[k].s21[0], r->at[k].s21[1])), 0.0, 0.3, RUNS);
        ck_assert_msg(apart(odd, r->at[k].s11, 1) <= 0.05, "%s: S11 at %.3g GHz is off by %.4f (%s)", r->id, 1e-9 * f, apart(odd, r->at[k].s11, 1), RUNS);
        ck_assert_msg(apart(odd + 2, r->at[k].s21, 1) <= 0.08, "%s: S21 at %.3g GHz is off by %.4f (%s)", r->id, 1e-9 * f,
                      apart(odd + 2, r->at[k].s21, 1), RUNS);
    }
    ck_assert_int_eq(lstub_transition_remarks(t), r->vias == 0 ? LSTUB_REMARK_RADIATES : 0);
    lstub_transition_destroy(t);
    stage_end(&g);
}
END_TEST

/* ---- stubs and drills ---------------------------------------------------------------------------- */

static size_t first_notches(stage *g, double f_max, lstub_notch *notch)
{
    lstub_transition *t = stage_make(g);
    size_t count = 0;
    for (int i = 0; i < 4; i++)
        LSTUB_INIT(notch[i]);
    int32_t status = lstub_transition_notches(t, LSTUB_MODE_SINGLE, 1, 0, f_max, notch, 4, sizeof notch[0], &count, &err);
    ck_assert_msg(status >= 0, "%s", err.message);
    lstub_transition_destroy(t);
    return count;
}

static void eight(stage *g, double loss)    /* eight copper layers, in at the top plane, out at C2, stub below */
{
    stage_begin(g, "PPSPPPPS", 0.2e-3, 17e-6, loss);
    coax(g);
    trace(g, 2)->width = 0.1e-3;
    stage_ring(g, 4, 0.9e-3);
}

START_TEST(without_a_stub_removing_it_changes_nothing)
{
    stage a, b;
    for (int i = 0; i < 2; i++) {
        stage *g = i ? &b : &a;
        stage_begin(g, "PPSPPS", 0.2e-3, _i ? 17e-6 : 0.0, 0.01);
        coax(g);
        trace(g, 5);
        stage_ring(g, 4, 0.9e-3);
        g->options.stubs = i ? LSTUB_STUBS_REMOVED : LSTUB_STUBS_KEPT;
    }
    ck_assert_double_eq(stages_apart(&a, &b, 110e9), 0.0);
    stage_end(&a);
    stage_end(&b);
}
END_TEST

START_TEST(the_notch_is_the_stubs)
{
    stage g;
    lstub_notch notch[4], none[4];
    double s[8];
    eight(&g, 0.005);
    ck_assert_uint_ge(first_notches(&g, 60e9, notch), 1);
    ck_assert_msg(notch[0].f > 15e9 && notch[0].f < 40e9, "a stub of 1 mm notches at %.3g GHz", 1e-9 * notch[0].f);
    ck_assert_double_lt(notch[0].depth_db, -20.0);
    stage_s(&g, notch[0].f, s);
    assert_close(20.0 * log10(magnitude(s, 2)), notch[0].depth_db, 0.0, 1e-9, "the notch's depth is |S21| there");
    stage_s(&g, notch[0].f * 1.001, s);
    ck_assert_double_gt(20.0 * log10(magnitude(s, 2)), notch[0].depth_db);
    stage_s(&g, notch[0].f * 0.999, s);
    ck_assert_double_gt(20.0 * log10(magnitude(s, 2)), notch[0].depth_db);
    g.options.stubs = LSTUB_STUBS_REMOVED;
    ck_assert_uint_eq(first_notches(&g, 1.3 * notch[0].f, none), 0);
    stage_s(&g, notch[0].f, s);
    ck_assert_double_gt(20.0 * log10(magnitude(s, 2)), -3.0);
    stage_end(&g);
}
END_TEST

START_TEST(deeper_drills_move_the_notch_up)
{
    double last = 0.0, s[8];
    for (double depth = 0.0; depth < 0.9e-3; depth += 0.05e-3) {
        stage g;
        lstub_notch notch[4];
        eight(&g, 0.005);
        if (depth > 0.0)
            stage_drill(&g, LSTUB_SIDE_BOTTOM, depth);
        size_t count = first_notches(&g, 110e9, notch);
        if (depth < 0.5e-3)
            ck_assert_uint_ge(count, 1);
        if (count == 0 || notch[0].f > 70e9)
            last = INFINITY;
        else {
            ck_assert_msg(notch[0].f > last, "drilled %.3g m deep: %.6g Hz after %.6g Hz", depth, notch[0].f, last);
            last = notch[0].f;
        }
        stage_s(&g, 10e9, s);
        ck_assert_double_gt(20.0 * log10(magnitude(s, 2)), -3.0);
        stage_end(&g);
    }
}
END_TEST

/* ---- where the planes end, and which layers return vias join ---------------------------------------- */

static void pair_of_stages(stage *a, stage *b, double loss)
{
    eight(a, loss);
    eight(b, loss);
    a->via.return_kind = b->via.return_kind = LSTUB_RETURN_NONE;
    a->via.return_count = b->via.return_count = 0;
    a->via.return_distance = b->via.return_distance = 0.0;
}

START_TEST(spans_over_all_layers_are_no_spans)
{
    stage a, b;
    pair_of_stages(&a, &b, 0.005);
    for (int i = 0; i < 3; i++) {
        stage_place(&a, 0.9e-3 - 0.5e-3 * i, 0.7e-3 * i - 0.3e-3, 0, 7);
        stage_place(&b, 0.9e-3 - 0.5e-3 * i, 0.7e-3 * i - 0.3e-3, 0, 6);        /* down to the last plane is as good */
    }
    ck_assert_double_le(stages_apart(&a, &b, 110e9), 1e-12);
    a.via.return_spans = NULL;
    ck_assert_double_le(stages_apart(&a, &b, 110e9), 1e-12);
    stage_end(&a);
    stage_end(&b);
}
END_TEST

START_TEST(vias_that_join_no_two_planes_are_none)
{
    stage a, b;
    pair_of_stages(&a, &b, 0.005);
    stage_place(&a, 3e-3, 0.0, 1, 2);                  /* from a plane to the trace's layer; beyond all openings' annuli */
    stage_place(&a, -3e-3, 0.3e-3, 2, 3);
    ck_assert_double_le(stages_apart(&a, &b, 110e9), 1e-12);
    stage_end(&a);
    stage_end(&b);
}
END_TEST

START_TEST(vias_beyond_the_exit_matter_to_the_stub_alone)
{
    stage a, b;
    pair_of_stages(&a, &b, 0.005);
    stage_place(&a, 0.9e-3, 0.0, 3, 6);
    double kept = stages_apart(&a, &b, 60e9);
    ck_assert_double_gt(kept, 0.05);
    a.options.stubs = b.options.stubs = LSTUB_STUBS_REMOVED;
    ck_assert_double_le(stages_apart(&a, &b, 60e9), 0.02 * kept);        /* openings without a barrel let little through */
    stage_end(&a);
    stage_end(&b);
}
END_TEST

START_TEST(far_edges_of_a_lossy_laminate_are_none)
{
    for (int kind = LSTUB_EDGE_OPEN; kind <= LSTUB_EDGE_SHORTED; kind++) {
        stage a, b;
        for (int i = 0; i < 2; i++) {
            stage *g = i ? &b : &a;
            stage_begin(g, "PPSPPP", 0.2e-3, 0.0, 0.5);
            coax(g);
            trace(g, 2);
        }
        stage_edges(&a, kind, 60e-3, 70e-3, 65e-3, 62e-3);
        lstub_transition *ta = stage_make(&a), *tb = stage_make(&b);
        double x[8], y[8];
        for (double f = 20e9; f <= 60e9; f += 10e9) {   /* e^-20 there and back at 20 GHz; the sum over modes is good to 2e-6 */
            s_at(ta, f, x);
            s_at(tb, f, y);
            ck_assert_msg(apart(x, y, 4) <= 2e-6, "%.3g GHz: %.3g", 1e-9 * f, apart(x, y, 4));
        }
        lstub_transition_destroy(ta);
        lstub_transition_destroy(tb);
        stage_end(&a);
        stage_end(&b);
    }
}
END_TEST

/* Resistance seen by the coaxial port of a barrel that hangs in one space between planes. */
static double resistance(const lstub_transition *t, double f)
{
    double s[2], d;
    s_at(t, f, s);
    d = (1.0 - s[0]) * (1.0 - s[0]) + s[1] * s[1];
    return 50.0 * (1.0 - s[0] * s[0] - s[1] * s[1]) / d;
}

START_TEST(resonances_of_a_rectangle)
{
    const double a = 30e-3, b = 20e-3;
    const struct { int kind, m, n; } mode[] = {{LSTUB_EDGE_OPEN, 1, 0},    {LSTUB_EDGE_OPEN, 0, 1},    {LSTUB_EDGE_OPEN, 1, 1},
                                               {LSTUB_EDGE_SHORTED, 1, 1}, {LSTUB_EDGE_SHORTED, 2, 1}, {LSTUB_EDGE_SHORTED, 1, 2}};
    const int m = mode[_i].m, n = mode[_i].n;
    const double want = C0 / (2.0 * sqrt(3.5)) * hypot(m / a, n / b);
    stage g;
    stage_begin(&g, "PP", 0.2e-3, 17e-6, 1e-3);
    coax(&g);
    stage_edges(&g, mode[_i].kind, 7e-3, a - 7e-3, 6e-3, b - 6e-3);
    lstub_transition *t = stage_make(&g);
    double best = 0.0, at = 0.0;
    for (double f = 0.98 * want; f < 1.02 * want; f += 1e-4 * want) {
        double r = resistance(t, f);
        if (r > best) {
            best = r;
            at = f;
        }
    }
    ck_assert_double_gt(best, 10.0 * resistance(t, 0.98 * want));
    /* Q is 1000; the barrel, 0.25 mm in 20 mm, pulls by its capacitance alone */
    assert_close(at, want, 1e-3, 0.0, "modes of a rectangle between planes, f = c/(2 sqrt Dk) sqrt((m/A)^2 + (n/B)^2), any text");
    lstub_transition_destroy(t);
    stage_end(&g);
}
END_TEST

/* ---- ports ----------------------------------------------------------------------------------------- */

static void tap(stage *g, double loss)      /* three ports: coaxial, and striplines in two spaces */
{
    stage_begin(g, "PPSPSPPS", 0.2e-3, 17e-6, loss);
    coax(g);
    trace(g, 2)->width = 0.1e-3;
    trace(g, 4)->impedance = 40.0;
    stage_ring(g, 4, 0.9e-3);
}

START_TEST(references_are_renormalised)
{
    const double before[3] = {50.0, 50.0, 50.0}, after[3] = {42.0, 100.0, 7.5};
    stage a, b;
    double x[18], y[18], z;
    tap(&a, 0.01);
    tap(&b, 0.01);
    for (int i = 0; i < 3; i++)
        b.port[i].z_ref = after[i];
    lstub_transition *tb = stage_make(&b);
    for (int i = 0; i < 3; i++) {
        assert_ok(lstub_transition_reference(tb, i, &z, &err), err);
        ck_assert_double_eq(z, after[i]);
    }
    for (double f = 1e7; f < 110e9; f *= 2.3) {
        stage_s(&a, f, x);
        s_at(tb, f, y);
        assert_ok(lstub_network_renormalise(x, 1, 3, before, after, x, NULL, &err), err);
        ck_assert_msg(apart(x, y, 9) <= 1e-10, "%.3g Hz: %.3g", f, apart(x, y, 9));
    }
    lstub_transition_destroy(tb);
    stage_end(&a);
    stage_end(&b);
}
END_TEST

START_TEST(ports_come_in_the_callers_order)
{
    const int order[3] = {2, 0, 1};
    stage a, b;
    double x[18], y[18], z;
    tap(&a, 0.01);
    tap(&b, 0.01);
    a.port[1].z_ref = 30.0;
    for (int i = 0; i < 3; i++)
        b.port[i] = a.port[order[i]];
    for (double f = 1e7; f < 110e9; f *= 3.1) {
        stage_s(&a, f, x);
        stage_s(&b, f, y);
        for (int i = 0; i < 3; i++)
            for (int j = 0; j < 3; j++)
                ck_assert_double_le(apart(y + 2 * (3 * i + j), x + 2 * (3 * order[i] + order[j]), 1), 1e-12);
    }
    lstub_transition *t = stage_make(&b);
    assert_ok(lstub_transition_reference(t, 2, &z, &err), err);
    ck_assert_double_eq(z, 30.0);
    ck_assert_int_eq(lstub_transition_ports(t), 3);
    lstub_transition_destroy(t);
    stage_end(&a);
    stage_end(&b);
}
END_TEST

/* S of a line on 50 ohm: dk (1 - j loss), impedance times sqrt(1/(1 - j loss)). */
static void line_s(double f, double dk, double loss, double impedance, double length, double *s)
{
    const double ref[2] = {50.0, 50.0};
    double complex root = csqrt(1.0 - I * loss), gl = I * 2.0 * PI * f / C0 * sqrt(dk) * root * length, z = impedance / root;
    double complex abcd[4] = {ccosh(gl), z * csinh(gl), csinh(gl) / z, ccosh(gl)};
    double plain[8];
    for (int i = 0; i < 4; i++) {
        plain[2 * i] = creal(abcd[i]);
        plain[2 * i + 1] = cimag(abcd[i]);
    }
    assert_ok(lstub_network_convert(plain, 1, 2, LSTUB_NETWORK_ABCD, LSTUB_NETWORK_S, ref, s, NULL, &err), err);
}

START_TEST(distance_is_a_line)
{
    const double loss = _i * 0.02;
    stage a, b;
    double x[8], y[8], line[8];
    for (int i = 0; i < 2; i++) {
        stage *g = i ? &b : &a;
        eight(g, loss);
        g->port[1].distance = i ? 7e-3 : 2e-3;
        g->port[1].dk = 3.2;
        g->port[1].impedance = 37.0;
    }
    for (double f = 1e7; f < 110e9; f *= 2.1) {
        stage_s(&a, f, x);
        stage_s(&b, f, y);
        line_s(f, 3.2, loss, 37.0, 5e-3, line);
        assert_ok(lstub_network_cascade(x, line, 1, 2, x, NULL, &err), err);
        assert_close(apart(x, y, 4), 0.0, 0.0, 1e-10, "5 mm of line behind it, by its chain matrix");
    }
    stage_end(&a);
    stage_end(&b);
}
END_TEST

START_TEST(a_trace_is_its_impedance_and_dk)     /* a cross-section of its own or the numbers it has at one frequency */
{
    lstub_trace cross;
    double z[2], gamma[2], x[8], y[8];
    const double f = 20e9;
    stage a, b;
    eight(&a, 0.0);
    eight(&b, 0.0);
    LSTUB_INIT(cross);
    cross.kind = LSTUB_TRACE_STRIPLINE;
    cross.width = 0.1e-3;
    cross.height_below = cross.height_above = 0.2e-3;
    cross.dielectric_below = &a.board.dielectric;
    a.port[1].trace = &cross;
    a.port[1].impedance = a.port[1].dk = a.port[1].width = 0.0;
    a.port[1].distance = b.port[1].distance = 3e-3;
    assert_ok(lstub_trace_line(&cross, &f, 1, z, gamma, &err), err);
    b.port[1].impedance = z[0];
    b.port[1].dk = pow(gamma[1] * C0 / (2.0 * PI * f), 2.0);
    stage_s(&a, f, x);
    stage_s(&b, f, y);
    assert_close(apart(x, y, 4), 0.0, 0.0, 1e-9, "a sheet in one dielectric without loss has no dispersion");
    stage_end(&a);
    stage_end(&b);
}
END_TEST

/* ---- limits ------------------------------------------------------------------------------------------ */

START_TEST(more_annuli_change_little)
{
    double at[3][8], first, second;
    const int annuli[3] = {4, 6, 8};
    for (double f = 5e9; f <= 40e9; f += 5e9) {
        for (int i = 0; i < 3; i++) {
            stage g;
            eight(&g, 0.005);
            g.options.annuli = annuli[i];
            stage_s(&g, f, at[i]);
            stage_end(&g);
        }
        first = apart(at[1], at[0], 4);
        second = apart(at[2], at[1], 4);
        ck_assert_msg(first < 0.02 && second < 0.5 * first + 1e-4, "%.3g GHz: 6 against 4 annuli %.4f, 8 against 6 %.4f", 1e-9 * f, first, second);
    }
}
END_TEST

START_TEST(nothing_happens_at_low_frequency)
{
    static const double f[] = {1e6, 3e6, 10e6, 30e6, 100e6};
    for (int metal = 0; metal < 2; metal++)
        for (size_t k = 0; k < COUNT(f); k++) {
            double s[18];
            stage g;
            eight(&g, 0.005);
            g.options.metal = metal ? LSTUB_METAL_PERFECT : LSTUB_METAL_LOSSY;
            stage_s(&g, f[k], s);
            /* 1 pF and 1 nH at f against 50 ohm; 2 mohm of copper */
            assert_close(s[4], 1.0, 0.0, 1e-4 + 2.0 * PI * f[k] * 4e-11, "a short piece of line passes all there is");
            ck_assert_double_le(magnitude(s, 0), 1e-4 + 2.0 * PI * f[k] * 4e-11);
            stage_end(&g);
            tap(&g, 0.005);                     /* three ports of 50, 50, 50 ohm in parallel */
            stage_s(&g, f[k], s);
            assert_close(s[0], -1.0 / 3.0, 0.0, 1e-3 + 2.0 * PI * f[k] * 4e-11, "three lines of one impedance in one point");
            assert_close(s[6], 2.0 / 3.0, 0.0, 1e-3 + 2.0 * PI * f[k] * 4e-11, "three lines of one impedance in one point");
            stage_end(&g);
        }
}
END_TEST

static void shrink(stage *g)
{
    for (size_t i = 0; i < g->board.count; i++)
        g->board.layer[i].thickness *= 0.5;
    g->via.drill *= 0.5;
    g->via.antipad *= 0.5;
    g->via.pad_start *= 0.5;
    g->via.pad_inner *= 0.5;
    g->via.pad_end *= 0.5;
    g->via.return_distance *= 0.5;
    g->via.lid_distance *= 0.5;
    g->via.pair_pitch *= 0.5;
    for (int i = 0; i < 4; i++) {
        g->via.edges[i] *= 0.5;
        g->antipads[i].value *= 0.5;
        g->port[i].width *= 0.5;
        g->port[i].distance *= 0.5;
    }
    for (int i = 0; i < 32; i++)
        g->xy[i] *= 0.5;
    g->drills[0].depth *= 0.5;
    g->drills[0].diameter *= 0.5;
    g->partner[0].depth *= 0.5;
    g->partner[0].diameter *= 0.5;
}

static void scaled(stage *g, int which)
{
    tap(g, 0.0);
    g->port[1].distance = 2e-3;
    if (which == 1) {
        stage_begin(g, "SPSPPSP", 0.2e-3, 17e-6, 0.0);
        trace(g, 0);
        trace(g, 2)->width = 0.1e-3;
        stage_place(g, 0.8e-3, 0.3e-3, 0, 6);
        stage_place(g, -0.8e-3, 0.5e-3, 3, 6);
        stage_drill(g, LSTUB_SIDE_BOTTOM, 0.25e-3);
        g->via.lid_distance = 0.7e-3;
    }
    if (which == 2) {
        stage_pair(g, LSTUB_PAIR_SEPARATE, 0.9e-3);
        stage_edges(g, LSTUB_EDGE_OPEN, 11e-3, 11.9e-3, 9e-3, 7e-3);
    }
    if (which == 3) {
        stage_pair(g, LSTUB_PAIR_SHARED, 0.9e-3);
        stage_partner(g, LSTUB_SIDE_BOTTOM, 0.25e-3);
    }
}

START_TEST(half_the_size_twice_the_frequency)
{
    stage a, b;
    double x[72], y[72];
    scaled(&a, _i);
    scaled(&b, _i);
    shrink(&b);
    lstub_transition *ta = stage_make(&a), *tb = stage_make(&b);
    int p = lstub_transition_ports(ta);
    for (double f = 1e8; f <= 55e9; f *= 1.7) {
        s_at(ta, f, x);
        s_at(tb, 2.0 * f, y);       /* 1, 2, 3: the axial flux takes the planes' capacitances at 1 GHz */
        ck_assert_msg(apart(x, y, p * p) <= (_i == 0 ? 1e-11 : 1e-6), "%.3g GHz: %.3g", 1e-9 * f, apart(x, y, p * p));
    }
    lstub_transition_destroy(ta);
    lstub_transition_destroy(tb);
    stage_end(&a);
    stage_end(&b);
}
END_TEST

START_TEST(sixty_layers)
{
    char kinds[61];
    stage g;
    lstub_notch notch[4];
    double s[8], sigma;
    memset(kinds, 'P', 60);
    kinds[60] = '\0';
    kinds[29] = kinds[59] = 'S';
    stage_begin(&g, kinds, 0.06e-3, 15e-6, 0.004);
    coax(&g);
    trace(&g, 29);
    stage_ring(&g, 4, 0.9e-3);
    g.options.metal = LSTUB_METAL_LOSSY;
    lstub_transition *t = stage_make(&g);
    for (double f = 1e6; f < 110e9; f *= 4.0) {
        s_at(t, f, s);
        assert_ok(lstub_network_passivity(s, 1, 2, &sigma, NULL, &err), err);
        ck_assert_msg(sigma <= 1.0 + 1e-9, "%.3g Hz: %.3g", f, sigma - 1.0);
    }
    lstub_transition_destroy(t);
    ck_assert_uint_ge(first_notches(&g, 60e9, notch), 1);
    ck_assert(notch[0].f > 5e9 && notch[0].f < 20e9);
    stage_end(&g);
}
END_TEST

/* ---- dimensions that pass a special value --------------------------------------------------------------- */

typedef void vary(stage *g, double x);

static void vary_drill(stage *g, double x) { eight(g, 0.005); stage_drill(g, LSTUB_SIDE_BOTTOM, x); }
static void vary_pad(stage *g, double x) { eight(g, 0.005); g->via.pad_inner = 0.25e-3 + x; }
static void vary_antipad(stage *g, double x)
{
    eight(g, 0.005);
    g->antipads[1].layer = copper(3);
    g->antipads[1].value = x;
    g->via.antipad_count = 2;
}
static void vary_trace(stage *g, double x)
{
    const double h[7] = {0.2e-3, x, 0.4e-3 - x, 0.2e-3, 0.2e-3, 0.2e-3, 0.2e-3};
    eight(g, 0.005);
    stage_layers(g, h);
    g->board.layer[copper(2)].thickness = 0.0;
}
static void vary_via(stage *g, double x)
{
    eight(g, 0.005);
    g->via.return_count = 0;
    stage_place(g, x, 0.5e-3, 0, 7);
}
static void vary_lid(stage *g, double x) { eight(g, 0.005); g->via.lid_distance = x; }
static void vary_thickness(stage *g, double x)
{
    eight(g, 0.005);
    for (size_t i = 0; i < g->board.count; i += 2)
        g->board.layer[i].thickness = x;
}

static const struct { const char *what; vary *make; double from, to, step; } varied[] = {
    {"the drill's tip passes a plane", vary_drill, 0.40e-3, 0.47e-3, 2e-6},     /* planes at 0.434 to 0.451 mm from the bottom */
    {"a pad vanishes", vary_pad, 0.0, 20e-6, 1e-6},
    {"an antipad passes its neighbours'", vary_antipad, 0.69e-3, 0.71e-3, 1e-6},
    {"a trace passes the middle", vary_trace, 0.19e-3, 0.21e-3, 1e-6},
    {"a trace comes near a plane", vary_trace, 1e-6, 12e-6, 1e-6},
    {"a return via passes by", vary_via, -30e-6, 30e-6, 2e-6},
    {"a lid far away", vary_lid, 5e-3, 5.02e-3, 2e-6},
    {"copper becomes a sheet", vary_thickness, 0.0, 2e-6, 1e-7},
};

/* Steps of S along the way: none is far greater than its neighbours. */
START_TEST(nothing_jumps)
{
    double last[8], s[8], step[64], worst = 0.0;
    int n = 0;
    for (double x = varied[_i].from; x < varied[_i].to + 0.5 * varied[_i].step; x += varied[_i].step) {
        stage g;
        varied[_i].make(&g, x);
        stage_s(&g, 20e9, s);
        stage_end(&g);
        if (n > 0)
            step[n - 1] = apart(s, last, 4);
        memcpy(last, s, sizeof s);
        n++;
    }
    for (int i = 1; i + 2 < n; i++)
        worst = fmax(worst, step[i] / (fmax(step[i - 1], step[i + 1]) + 2e-5));
    ck_assert_msg(worst < 3.0, "%s: a step %.3g times its neighbours", varied[_i].what, worst);
}
END_TEST

START_TEST(a_return_via_far_away_is_none)
{
    stage a, b;
    pair_of_stages(&a, &b, 0.3);
    stage_place(&a, 60e-3, 20e-3, 0, 7);
    lstub_transition *ta = stage_make(&a), *tb = stage_make(&b);
    double x[8], y[8];
    for (double f = 20e9; f < 70e9; f *= 1.5) {
        s_at(ta, f, x);
        s_at(tb, f, y);
        ck_assert_double_le(apart(x, y, 4), 1e-6);
    }
    lstub_transition_destroy(ta);
    lstub_transition_destroy(tb);
    stage_end(&a);
    stage_end(&b);
}
END_TEST

static Suite *transition_suite(void)
{
    Suite *suite = suite_create("transition");
    TCase *c;

    c = tcase_create("runs");
    tcase_add_loop_test(c, three_dimensional_runs, 0, (int)COUNT(runs));
    suite_add_tcase(suite, c);

    c = tcase_create("stubs");
    tcase_add_loop_test(c, without_a_stub_removing_it_changes_nothing, 0, 2);
    tcase_add_test(c, the_notch_is_the_stubs);
    tcase_add_test(c, deeper_drills_move_the_notch_up);
    suite_add_tcase(suite, c);

    c = tcase_create("planes");
    tcase_set_timeout(c, 60.0);
    tcase_add_test(c, spans_over_all_layers_are_no_spans);
    tcase_add_test(c, vias_that_join_no_two_planes_are_none);
    tcase_add_test(c, vias_beyond_the_exit_matter_to_the_stub_alone);
    tcase_add_test(c, far_edges_of_a_lossy_laminate_are_none);
    tcase_add_loop_test(c, resonances_of_a_rectangle, 0, 6);
    suite_add_tcase(suite, c);

    c = tcase_create("ports");
    tcase_add_test(c, references_are_renormalised);
    tcase_add_test(c, ports_come_in_the_callers_order);
    tcase_add_loop_test(c, distance_is_a_line, 0, 2);
    tcase_add_test(c, a_trace_is_its_impedance_and_dk);
    suite_add_tcase(suite, c);

    c = tcase_create("limits");
    tcase_set_timeout(c, 60.0);
    tcase_add_test(c, more_annuli_change_little);
    tcase_add_test(c, nothing_happens_at_low_frequency);
    tcase_add_loop_test(c, half_the_size_twice_the_frequency, 0, 4);
    tcase_add_test(c, sixty_layers);
    tcase_add_loop_test(c, nothing_jumps, 0, (int)COUNT(varied));
    tcase_add_test(c, a_return_via_far_away_is_none);
    suite_add_tcase(suite, c);
    return suite;
}

int main(void) { return test_main(transition_suite()); }
