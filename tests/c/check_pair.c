/* Pairs as networks: a three-dimensional run of unequal barrels, two barrels in one cascade against odd and even mode, mixed modes. */
#include "check_transition.h"

#include "model/transition.h"

/* ---- a pair of unequal barrels against a three-dimensional run ------------------------------------ */

#define RUN "finite-difference run made for this project: unequal_pair of the reference set; columns: driven at 1A, then at 1B"

static const struct { double f, s[16]; } unequal_run[] = {
    {5e9, {-0.0770, -0.0531, 0.6773, -0.6993, 0.0162, 0.0596, -0.0435, -0.0417, 0.0162, 0.0596, -0.0465, -0.0344, -0.0317, -0.0085, 0.7273, -0.6561}},
    {10e9, {-0.2029, 0.0254, -0.0699, -0.8993, 0.0778, 0.1230, -0.1391, 0.0154, 0.0778, 0.1230, -0.1132, 0.0400, -0.0558, 0.0143, 0.0890, -0.9361}},
    {20e9, {0.1939, 0.3201, -0.3606, -0.0384, 0.3699, -0.0921, 0.2294, 0.1660, 0.3702, -0.0922, 0.1379, 0.0501, -0.0403, 0.1010, -0.7578, -0.1749}},
    {30e9, {0.3207, 0.0035, -0.3005, 0.2237, -0.0343, -0.3611, -0.0173, -0.1698, -0.0345, -0.3611, 0.0233, -0.0230, 0.2668, 0.2101, -0.1296, 0.5204}},
    {40e9, {0.2131, -0.3798, -0.0073, 0.3620, -0.1514, 0.0624, 0.0228, 0.0207, -0.1514, 0.0625, 0.0756, -0.0863, 0.3355, -0.3429, 0.1154, 0.1565}},
};

static void reference_pair(stage *g)
{
    const double h[11] = {0.2e-3, 0.2e-3, 0.2e-3, 0.2e-3, 0.1e-3, 0.1e-3, 0.2e-3, 0.2e-3, 0.2e-3, 0.2e-3, 0.1e-3};
    stage_begin(g, "PPPPPSPPPPPS", 0.2e-3, 0.0, 0.005);
    stage_layers(g, h);
    coax(g)->dk = 1.524456;
    lstub_port *p = trace(g, 5);
    p->impedance = p->z_ref = 48.803;
    p->width = 0.113e-3;
    p->distance = 2e-3;
    stage_pair(g, LSTUB_PAIR_SEPARATE, 0.9e-3);
    stage_place(g, -0.9e-3, 0.0, 0, 10);
    stage_place(g, 1.8e-3, 0.0, 0, 10);
}

static double conversion(const double *s)   /* |Scd21| of columns 1A, 1B; entries 1A 2A 1B 2B a column */
{
    const double *b = s + 8;                              /* the second column */
    double re = 0.5 * (s[2] - b[2] + s[6] - b[6]), im = 0.5 * (s[3] - b[3] + s[7] - b[7]);
    return hypot(re, im);
}

START_TEST(three_dimensional_run_of_unequal_barrels)
{
    stage g;
    reference_pair(&g);
    stage_partner(&g, LSTUB_SIDE_BOTTOM, 0.5e-3);
    g.partner[0].diameter = g.via.drill;
    g.via.hole_dk = 3.5;                                 /* the run's second barrel ends within the laminate */
    lstub_transition *t = NULL;
    ck_assert_int_eq(stage_status(&g, NULL, &t), LSTUB_W_RANGE);
    ck_assert_int_eq(lstub_transition_remarks(t), LSTUB_REMARK_UNEQUAL);
    ck_assert_int_eq(lstub_transition_ports(t), 4);
    for (size_t k = 0; k < COUNT(unequal_run); k++) {
        double s[32], column[16];
        const double *want = unequal_run[k].s;
        s_at(t, unequal_run[k].f, s);
        for (int c = 0; c < 2; c++)
            for (int i = 0; i < 4; i++)
                memcpy(column + 8 * c + 2 * i, s + 2 * (4 * i + 2 * c), 2 * sizeof s[0]);
        ck_assert_msg(apart(column, want, 8) <= 0.05, "%.3g GHz: %.4f (%s)", 1e-9 * unequal_run[k].f, apart(column, want, 8), RUN);
        if (unequal_run[k].f <= 30e9)
            assert_close(20.0 * log10(conversion(column)), 20.0 * log10(conversion(want)), 0.0, 1.0, RUN);
    }
    lstub_transition_destroy(t);
    stage_end(&g);
}
END_TEST

/* ---- two barrels in one cascade against odd and even mode ------------------------------------------- */

/* Open-circuit impedances of the pair's model in one mode (sign -1, 1) or of both barrels (0), without the axial flux. */
static int impedances(stage *g, double sign, double f, cplx *z)
{
    lstub_model_options options;
    lstub__passage way;
    lstub__site site;
    lstub__barrel *barrel = NULL;
    lstub__cavity *cavity = NULL;
    lstub__cav_options how = {4, 0, 200e9};
    lstub_allocator allocator;
    cplx eps[LSTUB__CAV_MEDIA];
    LSTUB_INIT(options);
    memset(&way, 0, sizeof way);
    assert_ok(lstub__site_make(&site, g->board.stackup, &g->via, &options, &err), err);
    assert_ok(lstub__allocator(NULL, &allocator, &err), err);
    site.alloc = allocator;
    way.sign = sign;
    for (size_t i = 0; i < g->ports; i++)
        if (g->port[i].kind == LSTUB_PORT_COAX) {
            way.fed = 1;
            way.feed_dk = 1.5;
        } else
            way.layer[way.taps++] = g->port[i].layer;
    assert_ok(lstub__barrel_whole(&barrel, &site, &way, &err), err);
    barrel->shape.returns.flux = 0;
    barrel->shape.returns.pull = 0.0;
    ck_assert_int_eq(lstub__cavity_compile(&barrel->shape, &how, allocator.allocate, allocator.release, allocator.user, &cavity), 0);
    lstub__barrel_media(barrel, f, eps);
    int ports = lstub__cavity_ports(cavity, f, eps, NULL, z);
    lstub__cavity_destroy(cavity);
    lstub__barrel_free(barrel);
    return ports;
}

static void equal_pair(stage *g, int which)
{
    if (which == 0) {
        reference_pair(g);
        return;
    }
    stage_begin(g, which == 3 ? "SPSPSPPS" : "PPSPSPPS", 0.2e-3, 17e-6, 0.01);
    if (which == 3)
        trace(g, 0);
    else
        coax(g);
    trace(g, 2);
    trace(g, 4);
    stage_pair(g, LSTUB_PAIR_SEPARATE, 0.9e-3);
    if (which > 1) {
        stage_place(g, -0.8e-3, 0.4e-3, 0, 7);          /* with its mirror image */
        stage_place(g, 1.7e-3, 0.4e-3, 0, 7);
        stage_place(g, 0.45e-3, -1.1e-3, 1, 5);
        stage_drill(g, LSTUB_SIDE_BOTTOM, 0.3e-3);
    }
    if (which == 2)
        g->via.lid_distance = 0.5e-3;
}

START_TEST(equal_barrels_in_one_cascade_are_odd_and_even)
{
    stage g;
    equal_pair(&g, _i);
    lstub_transition_destroy(stage_make(&g));
    for (double f = _i > 1 ? 1e9 : 1e8; f < 80e9; f *= 2.3) {      /* drilled holes lose digits at low frequency */
        cplx odd[25], even[25], both[100];
        double worst = 0.0, size = 0.0;
        int n = impedances(&g, -1.0, f, odd);
        ck_assert_int_eq(impedances(&g, 1.0, f, even), n);
        ck_assert_int_eq(impedances(&g, 0.0, f, both), 2 * n);
        for (int i = 0; i < n; i++)
            for (int j = 0; j < n; j++) {
                cplx own = both[i * 2 * n + j], other = both[i * 2 * n + j + n];
                worst = fmax(worst, cplx_abs(cplx_sub(cplx_sub(own, other), odd[i * n + j])));
                worst = fmax(worst, cplx_abs(cplx_sub(cplx_add(own, other), even[i * n + j])));
                size = fmax(size, cplx_abs(even[i * n + j]));
            }
        ck_assert_msg(worst <= 1e-9 * size, "%.3g GHz: %.3g of %.3g ohm", 1e-9 * f, worst, size);
    }
    stage_end(&g);
}
END_TEST

/* ---- modes --------------------------------------------------------------------------------------------- */

START_TEST(equal_pairs_do_not_convert)
{
    const int32_t pairs[4] = {0, 2, 1, 3};
    const double z[4] = {48.803, 48.803, 48.803, 48.803};
    stage g;
    double s[32], mixed[32];
    reference_pair(&g);
    g.port[0].z_ref = g.port[1].z_ref = 48.803;
    lstub_transition *t = stage_make(&g);
    for (double f = 1e7; f < 110e9; f *= 2.7) {
        s_at(t, f, s);
        assert_ok(lstub_network_to_mixed(s, 1, 4, pairs, 2, z, mixed, NULL, NULL, &err), err);
        for (int i = 0; i < 2; i++)
            for (int j = 0; j < 2; j++) {
                ck_assert_double_le(magnitude(mixed, 4 * i + j + 2), 1e-12);
                ck_assert_double_le(magnitude(mixed, 4 * (i + 2) + j), 1e-12);
            }
    }
    lstub_transition_destroy(t);
    stage_end(&g);
}
END_TEST

START_TEST(notches_of_a_mode_are_minima_of_it)
{
    for (int unequal = 0; unequal < 2; unequal++)
        for (int mode = LSTUB_MODE_ODD; mode <= LSTUB_MODE_EVEN; mode++) {
            stage g;
            lstub_notch notch[4];
            size_t count = 0;
            double s[32], sign = mode == LSTUB_MODE_ODD ? -1.0 : 1.0;
            reference_pair(&g);
            if (unequal)
                stage_partner(&g, LSTUB_SIDE_BOTTOM, 0.3e-3);
            lstub_transition *t = stage_make(&g);
            for (int i = 0; i < 4; i++)
                LSTUB_INIT(notch[i]);
            ck_assert_int_ge(lstub_transition_notches(t, mode, 1, 0, 60e9, notch, 4, sizeof notch[0], &count, &err), 0);
            ck_assert_uint_ge(count, 1);
            s_at(t, notch[0].f, s);
            double re = 0.0, im = 0.0;                      /* ports 1A 2A 1B 2B: to 1 and 3, from 0 and 2 */
            for (int to = 1; to < 4; to += 2)
                for (int from = 0; from < 4; from += 2) {
                    double w = 0.5 * (to == 3 ? sign : 1.0) * (from == 2 ? sign : 1.0);
                    re += w * s[2 * (4 * to + from)];
                    im += w * s[2 * (4 * to + from) + 1];
                }
            assert_close(20.0 * log10(hypot(re, im)), notch[0].depth_db, 0.0, 1e-6, "Sdd21 and Scc21 from the single-ended S");
            lstub_transition_destroy(t);
            stage_end(&g);
        }
}
END_TEST

START_TEST(a_partner_far_away_is_none)
{
    stage a, b;
    double x[8], y[32];
    for (int i = 0; i < 2; i++) {
        stage *g = i ? &b : &a;
        stage_begin(g, "PPSPPS", 0.2e-3, 0.0, 0.3);
        coax(g);
        trace(g, 2);
        stage_ring(g, 3, 0.9e-3);
    }
    a.via.return_kind = b.via.return_kind = LSTUB_RETURN_NONE;
    stage_pair(&b, LSTUB_PAIR_SEPARATE, 60e-3);
    for (double f = 20e9; f < 80e9; f *= 1.4) {
        ck_assert_int_eq(stage_s(&a, f, x), 2);
        ck_assert_int_eq(stage_s(&b, f, y), 4);
        for (int i = 0; i < 2; i++) {
            assert_close(apart(y + 8 * i, x + 4 * i, 2), 0.0, 0.0, 1e-4, "60 mm of lossy laminate between them; the pads' pull falls as 1/gap");
            assert_close(apart(y + 8 * i + 4, (double[4]){0.0, 0.0, 0.0, 0.0}, 2), 0.0, 0.0, 1e-4, "60 mm of lossy laminate between them; the pads' pull falls as 1/gap");
        }
    }
    stage_end(&a);
    stage_end(&b);
}
END_TEST

START_TEST(which_barrel_is_drilled_does_not_matter)     /* but for the order of the ports */
{
    stage a, b;
    double x[32], y[32];
    reference_pair(&a);
    reference_pair(&b);
    for (int side = LSTUB_SIDE_BOTTOM; side <= LSTUB_SIDE_BOTTOM; side++) {
        stage_partner(&a, side, 0.35e-3);
        stage_drill(&b, side, 0.35e-3);
        stage_partner(&b, side, 0.0);
    }
    for (double f = 1e8; f < 110e9; f *= 2.1) {
        stage_s(&a, f, x);
        stage_s(&b, f, y);
        for (int i = 0; i < 4; i++)
            for (int j = 0; j < 4; j++)
                ck_assert_double_le(apart(x + 2 * (4 * i + j), y + 2 * (4 * ((i + 2) % 4) + (j + 2) % 4), 1), 1e-8);
    }
    stage_end(&a);
    stage_end(&b);
}
END_TEST

START_TEST(the_other_barrels_top_drill_is_its_own)      /* an undrilled barrel beside one drilled at the free top */
{
    stage g;
    double s[8];
    stage_begin(&g, "SPPPSPP", 0.2e-3, 0.0, 0.005);
    trace(&g, 4);
    stage_pair(&g, LSTUB_PAIR_SEPARATE, 0.9e-3);
    stage_place(&g, -0.9e-3, 0.0, 0, 6);
    stage_drill(&g, LSTUB_SIDE_TOP, 0.25e-3);
    stage_partner(&g, LSTUB_SIDE_TOP, 0.0);
    for (double f = 3e6; f < 1e9; f *= 2.0) {           /* open stubs below resonance: both reflect all there is */
        stage_s(&g, f, s);
        for (int i = 0; i < 2; i++) {
            double c = -tan(0.5 * atan2(s[6 * i + 1], s[6 * i])) / (2.0 * PI * f * 50.0);
            ck_assert_msg(c > 0.1e-12 && c < 2e-12, "%.3g Hz: barrel %d holds %.3g F", f, i, c);
        }
    }
    stage_end(&g);
}
END_TEST

static Suite *pair_suite(void)
{
    Suite *suite = suite_create("pair");
    TCase *c;

    c = tcase_create("runs");
    tcase_add_test(c, three_dimensional_run_of_unequal_barrels);
    suite_add_tcase(suite, c);

    c = tcase_create("cascade");
    tcase_set_timeout(c, 60.0);
    tcase_add_loop_test(c, equal_barrels_in_one_cascade_are_odd_and_even, 0, 4);
    suite_add_tcase(suite, c);

    c = tcase_create("modes");
    tcase_set_timeout(c, 60.0);
    tcase_add_test(c, equal_pairs_do_not_convert);
    tcase_add_test(c, notches_of_a_mode_are_minima_of_it);
    tcase_add_test(c, a_partner_far_away_is_none);
    tcase_add_test(c, which_barrel_is_drilled_does_not_matter);
    tcase_add_test(c, the_other_barrels_top_drill_is_its_own);
    suite_add_tcase(suite, c);
    return suite;
}

int main(void) { return test_main(pair_suite()); }
