/* The ladder, white-box: against the cavity model, exact limits, smoothness, where it is valid, memory. */
#include "check_model.h"
#include "model/cavity.h"
#include "model/ladder.h"

#define LAYERS 6

typedef struct stub {               /* six cavities of 0.2 mm between planes, a wall, an end pad */
    lstub__cav_barrel  shape;
    lstub__cav_copper  copper[LAYERS + 1];
    lstub__cav_layer   layer[LAYERS];
    lstub__cav_medium  medium[3];
    cplx eps[3];
} stub;

static void make(stub *s)
{
    memset(s, 0, sizeof *s);
    s->shape.radius = 125e-6;
    s->shape.copper = s->copper, s->shape.layer = s->layer, s->shape.layers = LAYERS;
    s->shape.medium = s->medium, s->shape.media = 3, s->shape.fill = s->shape.below_medium = 1;
    s->shape.outer = LSTUB__CAV_WALL, s->shape.wall = 0.9e-3;
    s->shape.hole = 225e-6;
    s->medium[0].dk = 3.6, s->medium[0].ratio = 1.1;
    s->medium[1].dk = s->medium[1].ratio = 1.0;
    s->medium[2].dk = 4.2, s->medium[2].ratio = 1.0;
    s->eps[0] = cplx_of(3.6, -0.02), s->eps[1] = cplx_of(1.0, 0.0), s->eps[2] = cplx_of(4.2, -0.05);
    for (int i = 0; i <= LAYERS; i++) {
        s->copper[i].thickness = 17e-6;
        s->copper[i].antipad = 0.4e-3;
        if (i < LAYERS)
            s->layer[i].thickness = 0.2e-3;
    }
    s->copper[LAYERS].pad = 0.25e-3;
    s->copper[LAYERS].medium = 1;
}

static void *plain_allocate(void *user, size_t bytes) { (void)user; return malloc(bytes); }
static void plain_release(void *user, void *memory) { (void)user; free(memory); }

static lstub__ladder *ladder_of(const stub *s)
{
    lstub__ladder *ladder = NULL;
    ck_assert_int_eq(lstub__ladder_make(&s->shape, plain_allocate, plain_release, NULL, &ladder), 0);
    return ladder;
}

static cplx by_ladder(const stub *s, double f)
{
    lstub__ladder *ladder = ladder_of(s);
    cplx z = lstub__ladder_zin(ladder, f, s->eps);
    lstub__ladder_free(ladder);
    return z;
}

static cplx by_cavity(const stub *s, double f)
{
    lstub__cavity *cavity = NULL;
    ck_assert_int_eq(lstub__cavity_compile(&s->shape, NULL, plain_allocate, plain_release, NULL, &cavity), 0);
    cplx z = lstub__cavity_zin(cavity, f, s->eps);
    lstub__cavity_destroy(cavity);
    return z;
}

/* One of each thing that it has to know. */
static void change(stub *s, int which)
{
    switch (which) {
    case 1: s->shape.end = 0.7e-3; break;
    case 2: s->copper[3].antipad = 0.0, s->copper[3].pad = 0.25e-3; break;
    case 3: s->copper[LAYERS].antipad = 0.0; break;
    case 4: s->copper[2].antipad = 0.5e-3, s->copper[2].pad = 0.3e-3; break;
    case 5: s->layer[2].medium = s->layer[3].medium = s->copper[3].medium = 2, s->copper[3].antipad = 0.0; break;
    case 6: s->shape.outer = LSTUB__CAV_OPEN; break;
    case 7: s->shape.below = LSTUB__CAV_LID, s->shape.lid = 0.3e-3; break;
    case 8: s->layer[4].thickness = 0.1e-3, s->copper[4].thickness = 70e-6; break;
    case 9: s->copper[3].thickness = 0.0; break;
    default: break;
    }
}

/* A tenth of the first notch: a capacitance, to what annuli leave undone; nearer to it: the same to a percent. */
START_TEST(as_the_cavity_model)
{
    stub s;
    make(&s);
    change(&s, _i);
    cplx low[2] = {by_ladder(&s, 2e9), by_cavity(&s, 2e9)}, near[2] = {by_ladder(&s, 15e9), by_cavity(&s, 15e9)};
    assert_close(low[0].im, low[1].im, 4e-3, 0, "cavity model");
    if (s.shape.outer == LSTUB__CAV_WALL)       /* a tip's field in the air of its hole counts as the laminate's: too lossy */
        assert_close(low[0].re, low[1].re, s.shape.end > 0.0 ? 6e-2 : 1e-2, 0, "cavity model");
    assert_close(near[0].re, near[1].re, 5e-2, 0, "cavity model");
    assert_close(near[0].im, near[1].im, 0, 0.01 * (cplx_abs(near[1]) + 50.0), "cavity model");
}
END_TEST

/* Half the size, twice the frequency. */
START_TEST(scale)
{
    stub s;
    make(&s);
    change(&s, _i);
    cplx whole = by_ladder(&s, 10e9);
    s.shape.radius /= 2, s.shape.wall /= 2, s.shape.hole /= 2, s.shape.end /= 2, s.shape.lid /= 2;
    for (int i = 0; i <= LAYERS; i++) {
        s.copper[i].thickness /= 2, s.copper[i].antipad /= 2, s.copper[i].pad /= 2;
        if (i < LAYERS)
            s.layer[i].thickness /= 2;
    }
    cplx half = by_ladder(&s, 20e9);
    assert_close(half.re, whole.re, 0, 1e-9 * cplx_abs(whole), "Maxwell's equations have no length");
    assert_close(half.im, whole.im, 0, 1e-9 * cplx_abs(whole), "Maxwell's equations have no length");
}
END_TEST

/* Neither gains nor, without loss, loses; finite at any frequency. */
START_TEST(passive)
{
    stub s;
    make(&s);
    change(&s, _i);
    lstub__ladder *ladder = ladder_of(&s);
    for (int lossy = 1; lossy >= 0; lossy--) {
        for (int i = 0; i < 3 && !lossy; i++)
            s.eps[i].im = 0.0;
        for (double f = 1e7; f < 200e9; f *= 1.07) {
            cplx z = lstub__ladder_zin(ladder, f, s.eps);
            ck_assert(isfinite(z.re) && isfinite(z.im) && z.re >= 0.0);
            if (!lossy && s.shape.outer == LSTUB__CAV_WALL)
                ck_assert_msg(z.re <= 1e-11 * (fabs(z.im) + 50.0), "%g Hz: %g %g", f, z.re, z.im);
        }
    }
    lstub__ladder_free(ladder);
}
END_TEST

/* No step where a dimension passes a special value. */
static void no_step(stub *s, double *dimension, double special, const char *what)
{
    double z[5], least = 1e-9 * special, keep = *dimension;
    for (int i = 0; i < 5; i++) {
        *dimension = special + (i - 2) * least;
        z[i] = by_ladder(s, 12e9).im;
    }
    *dimension = keep;
    for (int i = 0; i < 4; i++)
        ck_assert_msg(fabs(z[i + 1] - z[i]) <= 1e-6 * fabs(z[i]), "%s: %.12g to %.12g ohm", what, z[i], z[i + 1]);
}

START_TEST(smooth)
{
    stub s;
    make(&s);
    no_step(&s, &s.copper[2].antipad, 0.4e-3, "an antipad as wide as its neighbours'");
    no_step(&s, &s.copper[2].thickness, 17e-6, "a layer as thick as its neighbours");
    no_step(&s, &s.layer[2].thickness, 0.2e-3, "a dielectric as thick as its neighbours");
    no_step(&s, &s.shape.wall, 0.4e-3 + 1e-9, "a wall that reaches the antipads");
    no_step(&s, &s.copper[2].pad, 0.125e-3 + 1e-9, "a pad that comes out of the barrel");
    s.shape.end = 0.7e-3;
    no_step(&s, &s.shape.end, 0.851e-3 - 5e-6, "an end 5 um above a plane");
    no_step(&s, &s.shape.end, 0.868e-3 + 5e-6, "an end 5 um below a plane");
}
END_TEST

START_TEST(where_it_is_valid)
{
    stub s;
    make(&s);
    ck_assert(lstub__ladder_valid(&s.shape));
    s.shape.end = 0.5e-3;                               /* in a space of 0.2 mm */
    ck_assert(lstub__ladder_valid(&s.shape));
    s.shape.outer = LSTUB__CAV_OPEN;
    ck_assert(!lstub__ladder_valid(&s.shape));
    s.shape.end = 0.52e-3;
    ck_assert(lstub__ladder_valid(&s.shape));
    s.shape.outer = LSTUB__CAV_WALL;
    s.shape.end = 0.39e-3;                              /* the space is 0.51 of it */
    ck_assert(!lstub__ladder_valid(&s.shape));
    s.shape.end = 0.41e-3;
    ck_assert(lstub__ladder_valid(&s.shape));
    s.shape.end = 0.45e-3;                              /* 16 um below a plane */
    ck_assert(lstub__ladder_valid(&s.shape));
    s.copper[2].pad = 0.25e-3;                          /* and its pad */
    ck_assert(!lstub__ladder_valid(&s.shape));
    s.shape.end = 0.455e-3;
    ck_assert(lstub__ladder_valid(&s.shape));
    s.shape.end = 0.0;
    for (int i = 2; i <= 4; i++)
        s.copper[i].antipad = 0.0;                      /* 0.654 of it without plane */
    ck_assert(!lstub__ladder_valid(&s.shape));
    s.copper[4].antipad = 0.4e-3;                       /* 0.487 */
    ck_assert(lstub__ladder_valid(&s.shape));
    s.shape.outer = LSTUB__CAV_RING;
    s.shape.returns.pitch = 1e-3, s.shape.returns.sign = -1.0;
    ck_assert(lstub__ladder_valid(&s.shape));
    s.shape.returns.slot = 1;                           /* without return vias */
    ck_assert(!lstub__ladder_valid(&s.shape));
    s.shape.returns.vias = 1;
    ck_assert(lstub__ladder_valid(&s.shape));
    s.shape.returns.edge[0] = 10e-3;
    ck_assert(!lstub__ladder_valid(&s.shape));
}
END_TEST

typedef struct purse { int left, out; } purse;

static void *lend(void *user, size_t bytes)
{
    purse *p = user;
    if (p->left-- <= 0)
        return NULL;
    p->out++;
    return malloc(bytes);
}

static void take_back(void *user, void *memory)
{
    ((purse *)user)->out--;
    free(memory);
}

/* Whichever allocation fails: -1, nothing kept, nothing lost. */
START_TEST(memory)
{
    stub s;
    int failed = -1, count;
    make(&s);
    for (count = 0; failed != 0; count++) {
        purse p = {count, 0};
        lstub__ladder *ladder = NULL;
        failed = lstub__ladder_make(&s.shape, lend, take_back, &p, &ladder);
        ck_assert_int_eq(failed, ladder == NULL ? -1 : 0);
        ck_assert_int_eq(p.out, ladder == NULL ? 0 : 1);
        if (ladder != NULL)
            ck_assert_uint_lt(lstub__ladder_bytes(ladder), 4096);
        lstub__ladder_free(ladder);
        ck_assert_int_eq(p.out, 0);
        ck_assert_int_lt(count, 20);
    }
    ck_assert_int_ge(count, 5);
    lstub__ladder_free(NULL);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("ladder");
    TCase *all = tcase_create("ladder");
    tcase_set_timeout(all, 60);
    tcase_add_loop_test(all, as_the_cavity_model, 0, 10);
    tcase_add_loop_test(all, scale, 0, 9);
    tcase_add_loop_test(all, passive, 0, 10);
    tcase_add_test(all, smooth);
    tcase_add_test(all, where_it_is_valid);
    tcase_add_test(all, memory);
    suite_add_tcase(suite, all);
    return test_main(suite);
}
