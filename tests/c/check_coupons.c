/* Fits: Dk and length from a null, in-plane Dk from coupons, with what they say of their errors. */
#include "check_model.h"

/* ---- one stub ------------------------------------------------------------------------------------ */

START_TEST(dk_and_length)
{
    double dk = NAN, dk_sigma = NAN, length = NAN, length_sigma = NAN;
    LSTUB_INIT(err);
    assert_ok(lstub_fit_effective_dk(7.5e9, 75e6, 4e-3, 40e-6, 1, &dk, &dk_sigma, &err), err);
    assert_close(dk, 6.2413554, 1e-7, 0, "(c/(4 L f))^2: 299792458/1.2e8 squared");
    assert_close(dk_sigma / dk, 2.0 * sqrt(2.0) * 0.01, 1e-12, 0, "1 % of f and 1 % of L, each counting twice");
    assert_ok(lstub_fit_length(7.5e9, 75e6, dk, 0.04 * dk, 1, &length, &length_sigma, &err), err);
    assert_close(length, 4e-3, 1e-14, 0, "inverse of the above");
    assert_close(length_sigma / length, sqrt(0.01 * 0.01 + 0.02 * 0.02), 1e-12, 0, "1 % of f, half of 4 % of Dk");
    assert_ok(lstub_fit_length(3 * 7.5e9, 0.0, dk, 0.0, 3, &length, &length_sigma, &err), err);
    assert_close(length, 4e-3, 1e-14, 0, "the third null of the same stub");
    ck_assert(length_sigma == 0.0);
}
END_TEST

/* First order against drawn errors: the spread of 20000 results. */
START_TEST(errors_are_those_of_a_drawing)
{
    enum { N = 20000 };
    double sum[2] = {0.0, 0.0}, square[2] = {0.0, 0.0}, sigma[2], unused;
    LSTUB_INIT(err);
    for (uint64_t i = 0; i < N; i++) {
        double n[4], value[2];
        for (uint64_t k = 0; k < 4; k += 2) {
            double r = sqrt(-2.0 * log(1.0 - test_random(7, 4 * i + k))), a = 2.0 * PI * test_random(7, 4 * i + k + 1);
            n[k] = r * cos(a);
            n[k + 1] = r * sin(a);
        }
        assert_ok(lstub_fit_effective_dk(8e9 * (1 + 0.01 * n[0]), 0.0, 3e-3 * (1 + 0.02 * n[1]), 0.0, 1, &value[0], &unused, &err), err);
        assert_ok(lstub_fit_length(8e9 * (1 + 0.01 * n[2]), 0.0, 5.0 * (1 + 0.03 * n[3]), 0.0, 1, &value[1], &unused, &err), err);
        for (int k = 0; k < 2; k++) {
            sum[k] += value[k];
            square[k] += value[k] * value[k];
        }
    }
    assert_ok(lstub_fit_effective_dk(8e9, 0.08e9, 3e-3, 0.06e-3, 1, &unused, &sigma[0], &err), err);
    assert_ok(lstub_fit_length(8e9, 0.08e9, 5.0, 0.15, 1, &unused, &sigma[1], &err), err);
    for (int k = 0; k < 2; k++)
        assert_close(sqrt(square[k] / N - sum[k] / N * sum[k] / N), sigma[k], 0.03, 0, "a drawing of 20000 with normal errors");
}
END_TEST

START_TEST(one_stub_refuses)
{
    double a = 1.0, b = 2.0;
    assert_refused(lstub_fit_effective_dk(0.0, 0.0, 1e-3, 0.0, 1, &a, &b, &err), LSTUB_E_ARGUMENT, err, "f = 0|Hz");
    assert_refused(lstub_fit_effective_dk(1e10, -1.0, 1e-3, 0.0, 1, &a, &b, &err), LSTUB_E_ARGUMENT, err, "f_sigma = -1 Hz|<= 1e+10");
    assert_refused(lstub_fit_effective_dk(1e10, 0.0, 1e-3, NAN, 1, &a, &b, &err), LSTUB_E_ARGUMENT, err, "length_sigma = nan");
    assert_refused(lstub_fit_effective_dk(1e10, 0.0, 1e-3, 0.0, 2, &a, &b, &err), LSTUB_E_ARGUMENT, err, "n = 2");
    assert_refused(lstub_fit_length(1e10, 0.0, 4.0, 5.0, 1, &a, &b, &err), LSTUB_E_ARGUMENT, err, "dk_sigma = 5");
    assert_refused(lstub_fit_length(1e10, 0.0, 4.0, 0.0, 1, &a, NULL, &err), LSTUB_E_NULL, err, "length_sigma");
    ck_assert(a == 1.0 && b == 2.0);
    ck_assert_int_eq(lstub_fit_effective_dk(50e9, 0.0, 3e-3, 0.0, 1, &a, &b, &err), LSTUB_W_RANGE);   /* Dk 0.25: told, not hidden */
    assert_close(a, 0.2496, 1e-3, 0, "(c/(4 L f))^2");
}
END_TEST

/* ---- coupons of a made-up law -------------------------------------------------------------------- */

#define COUPONS 1024

typedef struct law {             /* f = c/(4 (length + offset) sqrt(4 ratio)) */
    double length[COUPONS], f[COUPONS], sigma[COUPONS];
    size_t count;
    long   asked;
    double none_beyond;          /* ratio above which there is no notch; 0: none */
    int32_t fail;                /* status to give from the third question on */
} law;

static law coupons;

static int32_t quarter_wave(void *user, double ratio, double offset, size_t coupon, double *f)
{
    law *l = user;
    ck_assert_uint_lt(coupon, l->count);
    if (++l->asked > 2 && l->fail != 0)
        return l->fail;
    *f = C0 / (4.0 * (l->length[coupon] + offset) * sqrt(4.0 * ratio));
    if (l->none_beyond > 0.0 && ratio > l->none_beyond)
        *f = NAN;
    return LSTUB_OK;
}

/* Lengths 1 to 3 mm, sigma of 0.3 %, errors of `wrong` sigma. */
static void lay(size_t count, double ratio, double offset, double wrong, uint64_t seed)
{
    memset(&coupons, 0, sizeof coupons);
    coupons.count = count;
    for (size_t i = 0; i < count; i++) {
        double r = sqrt(-2.0 * log(1.0 - test_random(seed, 2 * i))), a = 2.0 * PI * test_random(seed, 2 * i + 1), f = NAN;
        coupons.length[i] = 1e-3 + 2e-3 * (count > 1 ? (double)i / (double)(count - 1) : 0.0);
        quarter_wave(&coupons, ratio, offset, i, &f);
        coupons.sigma[i] = 3e-3 * f;
        coupons.f[i] = f * (1.0 + 3e-3 * wrong * r * cos(a));
    }
    coupons.asked = 0;
}

static lstub_fit fit_law(int32_t with_offset, double *residuals)
{
    lstub_fit fit;
    LSTUB_INIT(fit);
    LSTUB_INIT(err);
    assert_ok(lstub_fit_in_plane_dk(quarter_wave, &coupons, coupons.f, coupons.sigma, coupons.count, with_offset, &fit, residuals, &err), err);
    return fit;
}

START_TEST(exact_coupons)
{
    static const double ratios[] = {0.55, 0.8, 1.0, 1.27, 1.9};
    double residuals[5];
    for (size_t k = 0; k < COUNT(ratios); k++)
        for (int32_t with_offset = 0; with_offset < 2; with_offset++) {
            double offset = with_offset ? (k % 2 ? 150e-6 : -80e-6) : 0.0;
            lay(5, ratios[k], offset, 0.0, 1);
            lstub_fit fit = fit_law(with_offset, residuals);
            assert_close(fit.ratio, ratios[k], 1e-7, 0, "the ratio put in");
            assert_close(fit.offset, offset, 0, 1e-10, "the offset put in");
            ck_assert_int_eq(fit.dof, with_offset ? 3 : 4);
            ck_assert_int_eq(fit.describes, 1);
            ck_assert(fit.chi2 < 1e-6);
            for (int i = 0; i < 5; i++)
                assert_close(residuals[i], 0, 0, 1e-5 * coupons.f[i], "no errors put in");
            if (!with_offset)
                assert_close(fit.ratio_sigma, 2.0 * 3e-3 / sqrt(5.0) * ratios[k], 1e-4, 0, "f ~ ratio^-1/2, five coupons of 0.3 %");
        }
}
END_TEST

typedef struct quantile {
    int32_t dof;
    double  value;
} quantile;

/* SciPy 1.17.1: scipy.stats.t.ppf(0.975, dof); dof 0 here stands for scipy.stats.norm.ppf(0.975). */
static const quantile student[] = {
    {0, 1.959963984540054}, {1, 12.70620473617469}, {2, 4.302652729749462}, {3, 3.182446305283708},
    {4, 2.776445105197793}, {5, 2.570581835636315}, {6, 2.446911851144979}, {7, 2.364624251592784},
    {9, 2.262157162798205}, {10, 2.228138851986274}, {20, 2.085963447265864}, {29, 2.045229642132703},
    {30, 2.042272456301238}, {100, 1.983971518523552}, {999, 1.962341461133449},
};

START_TEST(intervals_are_of_student)
{
    const quantile *q = &student[_i];
    lay((size_t)q->dof + 1, 1.1, 0.0, 0.0, 1);
    lstub_fit fit = fit_law(0, NULL);
    ck_assert_int_eq(fit.dof, q->dof);
    assert_close((fit.ratio_high - fit.ratio_low) / (2.0 * fit.ratio_sigma), q->value, 1e-12, 0, "SciPy");
    assert_close(0.5 * (fit.ratio_high + fit.ratio_low), fit.ratio, 1e-15, 0, "symmetric");
}
END_TEST

/* SciPy 1.17.1: scipy.stats.chi2.isf(0.01, dof). */
static const quantile chi2[] = {
    {1, 6.634896601021217}, {2, 9.210340371976182}, {3, 11.34486673014437}, {4, 13.27670413598763},
    {7, 18.47530690658236}, {10, 23.20925115895436}, {29, 49.58788447289881}, {100, 135.8067231710268},
    {999, 1105.916957504582},
};

/* Residuals are laid so that chi2 comes just below and just above the quantile: pairs of equal coupons that differ by the same. */
START_TEST(verdicts_are_of_chi2)
{
    const quantile *q = &chi2[_i];
    for (int above = 0; above < 2; above++) {
        double want = q->value * (above ? 1.0 + 1e-6 : 1.0 - 1e-6), apart;
        size_t count = (size_t)q->dof + 1;
        lay(count, 1.1, 0.0, 0.0, 1);
        for (size_t i = 0; i < count; i++) {
            coupons.length[i] = coupons.length[0];
            coupons.f[i] = coupons.f[0];
            coupons.sigma[i] = coupons.sigma[0];
        }
        apart = sqrt(want * (double)count / (double)(count - 1)) * coupons.sigma[0];     /* one off by this: chi2 = apart^2 (n-1)/n */
        coupons.f[0] += apart;
        lstub_fit fit = fit_law(0, NULL);
        assert_close(fit.chi2, want, 1e-7, 0, "sum of squares about the mean");
        ck_assert_int_eq(fit.describes, !above);
        double one = 3e-3 * 2.0 * fit.ratio / sqrt((double)count), wider = fmax(1.0, sqrt(want / q->dof));
        assert_close(fit.ratio_sigma, one * wider, 0.05, 0, "errors widened by sqrt(chi2/dof)");
    }
}
END_TEST

/* Of 400 draws 95 % of the intervals hold the truth: 0.95 +- 0.033 at 3 sigma of the count, from above too. */
START_TEST(intervals_hold_the_truth)
{
    int within_ratio = 0, within_offset = 0, described = 0;
    enum { N = 400 };
    for (uint64_t i = 0; i < N; i++) {
        lay(6, 1.2, 60e-6, 1.0, 1000 + i);
        lstub_fit fit = fit_law(1, NULL);
        within_ratio += fit.ratio_low <= 1.2 && 1.2 <= fit.ratio_high;
        within_offset += fit.offset_low <= 60e-6 && 60e-6 <= fit.offset_high;
        described += fit.describes;
    }
    ck_assert_msg(within_ratio >= 0.917 * N && within_offset >= 0.917 * N, "%d and %d of %d", within_ratio, within_offset, N);
    ck_assert_msg(described >= 0.97 * N && described < N, "%d of %d described: 99 %% wanted", described, N);
}
END_TEST

START_TEST(a_law_that_does_not_hold)
{
    lay(6, 1.2, 400e-6, 1.0, 3);             /* an offset that is not asked for */
    lstub_fit without = fit_law(0, NULL), with = fit_law(1, NULL);
    ck_assert_int_eq(without.describes, 0);
    ck_assert(without.chi2 > 100.0);
    ck_assert(without.offset == 0.0 && without.offset_sigma == 0.0);
    ck_assert_int_eq(with.describes, 1);
    assert_close(with.offset, 400e-6, 0, 4.0 * with.offset_sigma, "the offset put in");
}
END_TEST

static int32_t refuse_law(int32_t with_offset, lstub_fit *fit, double *residuals)
{
    return lstub_fit_in_plane_dk(quarter_wave, &coupons, coupons.f, coupons.sigma, coupons.count, with_offset, fit, residuals, &err);
}

START_TEST(coupons_refuse)
{
    lstub_fit fit;
    unsigned char residuals[5 * sizeof(double)];
    memset(residuals, POISON, sizeof residuals);
    poison(fit);
    double *r = (double *)(void *)residuals;
    lay(5, 1.0, 0.0, 0.0, 1);
    assert_refused(lstub_fit_in_plane_dk(NULL, NULL, coupons.f, coupons.sigma, 5, 0, &fit, r, &err), LSTUB_E_NULL, err, "predict");
    assert_refused(lstub_fit_in_plane_dk(quarter_wave, &coupons, NULL, coupons.sigma, 5, 0, &fit, r, &err), LSTUB_E_NULL, err, "f");
    assert_refused(lstub_fit_in_plane_dk(quarter_wave, &coupons, coupons.f, NULL, 5, 0, &fit, r, &err), LSTUB_E_NULL, err, "f_sigma");
    assert_refused(lstub_fit_in_plane_dk(quarter_wave, &coupons, coupons.f, coupons.sigma, 0, 0, &fit, r, &err), LSTUB_E_ARGUMENT, err, "count = 0|>= 1");
    assert_refused(lstub_fit_in_plane_dk(quarter_wave, &coupons, coupons.f, coupons.sigma, 1, 1, &fit, r, &err), LSTUB_E_ARGUMENT, err, "count = 1|>= 2");
    assert_refused(lstub_fit_in_plane_dk(quarter_wave, &coupons, coupons.f, coupons.sigma, 5, 0, NULL, r, &err), LSTUB_E_NULL, err, "out");
    coupons.sigma[3] = 0.0;
    assert_refused(refuse_law(0, &fit, r), LSTUB_E_ARGUMENT, err, "coupon 3|f_sigma = 0 Hz");
    ck_assert_int_eq((int)err.index, 3);
    coupons.sigma[3] = 1e7;
    coupons.f[2] = NAN;
    assert_refused(refuse_law(0, &fit, r), LSTUB_E_ARGUMENT, err, "coupon 2|f = nan");
    lay(5, 2.5, 0.0, 0.0, 1);
    assert_refused(refuse_law(0, &fit, r), LSTUB_E_NONE, err, "ratio = 2|0.5 to 2");
    lay(5, 0.3, 0.0, 0.0, 1);
    assert_refused(refuse_law(0, &fit, r), LSTUB_E_NONE, err, "ratio = 0.5");
    lay(5, 1.0, 0.0, 0.0, 1);
    for (int i = 0; i < 5; i++)
        coupons.length[i] = 1e-3;
    assert_refused(refuse_law(1, &fit, r), LSTUB_E_GEOMETRY, err, "lengths must differ");
    lay(5, 1.0, 0.0, 0.0, 1);
    coupons.fail = LSTUB_E_GEOMETRY;
    assert_refused(refuse_law(0, &fit, r), LSTUB_E_GEOMETRY, err, "coupon|predict");
    lay(5, 1.5, 0.0, 0.0, 1);
    coupons.none_beyond = 0.9;
    assert_refused(refuse_law(0, &fit, r), LSTUB_E_NONE, err, "no notch");
    coupons.none_beyond = 1.3;               /* the way to 1.5 is barred */
    assert_refused(refuse_law(0, &fit, r), LSTUB_E_NONE, err, "no notch");
    assert_untouched(fit);
    ck_assert(poisoned(residuals, sizeof residuals));
}
END_TEST

/* ---- coupons of the model ------------------------------------------------------------------------ */

static double ratio_of(const lstub_stackup *stackup, int32_t i)
{
    lstub_layer layer;
    LSTUB_INIT(layer);
    assert_ok(lstub_stackup_layer(stackup, i, &layer, &err), err);
    return layer.dielectric->in_plane_ratio;
}

START_TEST(a_stackup_with_another_ratio)
{
    lstub_stackup *changed = NULL;
    test_memory memory;
    lstub_allocator a = test_allocator(&memory);
    assert_ok(lstub_stackup_with_in_plane_ratio(board.stackup, 1.25, &a, &changed, &err), err);
    ck_assert_int_eq(lstub_stackup_count(changed), lstub_stackup_count(board.stackup));
    for (int32_t i = 0; i < lstub_stackup_count(changed); i++) {
        lstub_layer was, is;
        LSTUB_INIT(was);
        LSTUB_INIT(is);
        assert_ok(lstub_stackup_layer(board.stackup, i, &was, &err), err);
        assert_ok(lstub_stackup_layer(changed, i, &is, &err), err);
        ck_assert_str_eq(is.name, was.name);
        ck_assert(is.name != was.name);
        ck_assert(is.kind == was.kind && is.thickness == was.thickness && is.dielectric->dk == was.dielectric->dk);
        ck_assert(is.dielectric->loss_tangent == was.dielectric->loss_tangent);
        ck_assert(ratio_of(changed, i) == 1.25 && ratio_of(board.stackup, i) == 1.0);
    }
    lstub_stackup_destroy(changed);
    ck_assert_int_eq(memory.live, 0);
    changed = NULL;
    assert_refused(lstub_stackup_with_in_plane_ratio(board.stackup, 0.4, NULL, &changed, &err), LSTUB_E_ARGUMENT, err, "ratio = 0.4|0.5");
    assert_refused(lstub_stackup_with_in_plane_ratio(NULL, 1.0, NULL, &changed, &err), LSTUB_E_NULL, err, "stackup");
    ck_assert(changed == NULL);
}
END_TEST

enum { VIAS = 4 };
static int32_t exits[VIAS][2];
static lstub_via vias[VIAS];
static double measured_f[VIAS], measured_sigma[VIAS];

/* Through vias that leave on four layers, as a laminate of that ratio would show them. */
static void measure_coupons(double ratio, double offset, int32_t fidelity)
{
    lstub_stackup *truth = NULL;
    assert_ok(lstub_stackup_with_in_plane_ratio(board.stackup, ratio, NULL, &truth, &err), err);
    for (int i = 0; i < VIAS; i++) {
        lstub_stub stub[2];
        int32_t n = 0;
        exits[i][0] = copper(0);
        exits[i][1] = copper(1 + i);
        vias[i] = board_via(exits[i], 2);
        LSTUB_INIT(stub[0]);
        LSTUB_INIT(stub[1]);
        assert_ok(lstub_via_stubs(truth, &vias[i], stub, sizeof stub[0], &n, &err), err);
        ck_assert_int_eq(n, 1);
        measured_f[i] = first_notch(truth, &vias[i], fidelity) * stub[0].length / (stub[0].length + offset);
        measured_sigma[i] = 2e-3 * measured_f[i];
    }
    lstub_stackup_destroy(truth);
}

START_TEST(coupons_of_the_model)
{
    static const int32_t fidelities[] = {LSTUB_FIDELITY_LOADED, LSTUB_FIDELITY_LADDER, LSTUB_FIDELITY_CAVITY};
    lstub_model_options o = options(fidelities[_i]);
    for (int32_t with_offset = 0; with_offset < 2; with_offset++) {
        lstub_fit fit;
        lstub_stackup *fitted = NULL;
        test_memory memory;
        lstub_allocator a = test_allocator(&memory);
        double residuals[VIAS], offset = with_offset ? 40e-6 : 0.0;
        LSTUB_INIT(fit);
        LSTUB_INIT(err);
        measure_coupons(1.17, offset, o.fidelity);
        int32_t status = lstub_fit_coupons(board.stackup, vias, VIAS, sizeof vias[0], measured_f, measured_sigma, with_offset, &o, &a, &fitted, &fit,
                                           residuals, &err);
        ck_assert_msg(status == LSTUB_OK || (status == LSTUB_W_RANGE && strstr(err.message, "range")), "%s", err.message);
        assert_close(fit.ratio, 1.17, 1e-6, 0, "the ratio put in");
        assert_close(fit.offset, offset, 0, 1e-9, "the offset put in");
        for (int i = 0; i < VIAS; i++)
            assert_close(residuals[i], 0, 0, 1e-5 * measured_f[i], "no errors put in");
        ck_assert(ratio_of(fitted, 0) == fit.ratio && ratio_of(fitted, 5) == fit.ratio);
        if (!with_offset)
            assert_close(first_notch(fitted, &vias[2], o.fidelity), measured_f[2], 1e-6, 0, "fed back, the model meets the measurement");
        lstub_stackup_destroy(fitted);
        ck_assert_int_eq(memory.live, 0);
    }
}
END_TEST

START_TEST(coupons_of_the_model_refuse)
{
    lstub_fit fit;
    lstub_stackup *fitted = NULL;
    test_memory memory;
    lstub_allocator a = test_allocator(&memory);
    poison(fit);
    measure_coupons(1.1, 0.0, LSTUB_FIDELITY_LOADED);
    for (long fail = 1; fail < 400; fail++) {
        a = test_allocator(&memory);
        memory.fail_at = fail;
        LSTUB_INIT(err);
        int32_t status = lstub_fit_coupons(board.stackup, vias, VIAS, sizeof vias[0], measured_f, measured_sigma, 0, LOADED, &a, &fitted, &fit, NULL, &err);
        if (status >= 0)
            break;
        ck_assert_int_eq(status, LSTUB_E_MEMORY);
        ck_assert_int_eq(memory.live, 0);
        ck_assert(fitted == NULL);
        assert_untouched(fit);
    }
    ck_assert_msg(fitted != NULL, "it never came through");
    lstub_stackup_destroy(fitted);
    ck_assert_int_eq(memory.live, 0);
    fitted = NULL;
    poison(fit);
    vias[1].drill = -1.0;
    assert_refused(lstub_fit_coupons(board.stackup, vias, VIAS, sizeof vias[0], measured_f, measured_sigma, 0, LOADED, NULL, &fitted, &fit, NULL, &err),
                   LSTUB_E_ARGUMENT, err, "coupon 1|drill = -1 m");
    ck_assert_int_eq((int)err.index, 1);
    vias[1].drill = 0.25e-3;
    exits[1][1] = copper(7);                 /* no stub, no notch */
    assert_refused(lstub_fit_coupons(board.stackup, vias, VIAS, sizeof vias[0], measured_f, measured_sigma, 0, LOADED, NULL, &fitted, &fit, NULL, &err),
                   LSTUB_E_NONE, err, "coupon 1|no notch");
    assert_refused(lstub_fit_coupons(board.stackup, vias, VIAS, 8, measured_f, measured_sigma, 0, LOADED, NULL, &fitted, &fit, NULL, &err),
                   LSTUB_E_SIZE, err, "vias: stride = 8");
    assert_refused(lstub_fit_coupons(board.stackup, NULL, VIAS, sizeof vias[0], measured_f, measured_sigma, 0, LOADED, NULL, &fitted, &fit, NULL, &err),
                   LSTUB_E_NULL, err, "vias");
    assert_refused(lstub_fit_coupons(board.stackup, vias, 0, sizeof vias[0], measured_f, measured_sigma, 0, LOADED, NULL, &fitted, &fit, NULL, &err),
                   LSTUB_E_ARGUMENT, err, "count = 0");
    ck_assert(fitted == NULL);
    assert_untouched(fit);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("coupons");
    TCase *one = tcase_create("one stub"), *laws = tcase_create("laws"), *models = tcase_create("models");
    tcase_add_test(one, dk_and_length);
    tcase_add_test(one, errors_are_those_of_a_drawing);
    tcase_add_test(one, one_stub_refuses);
    tcase_add_test(laws, exact_coupons);
    tcase_add_loop_test(laws, intervals_are_of_student, 0, (int)COUNT(student));
    tcase_add_loop_test(laws, verdicts_are_of_chi2, 0, (int)COUNT(chi2));
    tcase_add_test(laws, intervals_hold_the_truth);
    tcase_add_test(laws, a_law_that_does_not_hold);
    tcase_add_test(laws, coupons_refuse);
    tcase_add_checked_fixture(models, setup, teardown);
    tcase_set_timeout(models, 120);
    tcase_add_test(models, a_stackup_with_another_ratio);
    tcase_add_loop_test(models, coupons_of_the_model, 0, 3);
    tcase_add_test(models, coupons_of_the_model_refuse);
    suite_add_tcase(suite, one);
    suite_add_tcase(suite, laws);
    suite_add_tcase(suite, models);
    return test_main(suite);
}
