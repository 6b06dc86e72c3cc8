#include "model/branch.h"

#include "model/notch_search.h"
#include "num/root.h"

#include <math.h>

#define CAVITY_RANGE 110e9    /* Hz, top of the stated range of the cavity model                            */
#define CAVITY_TOP   200e9    /* Hz, where it still answers, and looks for a first notch                    */
#define LADDER_ERROR 0.026    /* covers all valid ones of 2500 random cells; 99 of 100 are within 0.007      */
#define LADDER_WIDE  0.2      /* outside lstub__ladder_valid: 97 of 100 (docs/theory.md)                    */
#define COARSE       2        /* annuli of the second model that says how far the first one may be off ...  */
#define FINER        4        /* ... and of the one that says it of so coarse a first one                   */

static int32_t made(int failed, lstub_error *err)
{
    if (failed == 0)
        return LSTUB_OK;
    if (failed == -1)
        return lstub__fail(err, LSTUB_E_MEMORY, "allocator", -1, "out of memory: a model of a barrel");
    return lstub__fail(err, LSTUB_E_UNSUPPORTED, "via", -1, "via: the barrel has more layers, rims or media than the model takes");
}

static int32_t compile(const lstub__branch *branch, const lstub__site *site, int annuli, lstub__cavity **out, lstub_error *err)
{
    lstub__cav_options options = {annuli, 0, CAVITY_TOP};
    return made(lstub__cavity_compile(&branch->barrel->shape, &options, site->alloc.allocate, site->alloc.release, site->alloc.user, out), err);
}

double lstub__branch_range(const lstub__site *site, int arm)
{
    return site->fidelity <= LSTUB_FIDELITY_LOADED ? site->arm[arm].f_range : CAVITY_RANGE;
}

void lstub__branch_closed(lstub__branch *branch, const lstub__site *site, int arm, double length)
{
    branch->fidelity = site->fidelity;
    branch->length = length;
    branch->barrel = NULL;
    branch->ladder = NULL;
    branch->cavity = branch->other = NULL;
    lstub__site_line(site, arm, length, &branch->line);
    branch->lossless = branch->line.lossless;
    branch->f_range = branch->line.f_range;
    branch->f_top = LSTUB__F_MAX;
    branch->stated_error = branch->line.stated_error;
}

int32_t lstub__branch_make(lstub__branch *branch, const lstub__site *site, int arm, double length, lstub_error *err)
{
    int32_t status;
    lstub__branch_closed(branch, site, arm, length);
    if (site->fidelity <= LSTUB_FIDELITY_LOADED)
        return LSTUB_OK;
    if ((status = lstub__barrel_make(&branch->barrel, site, arm, length, err)) < 0)
        return status;
    branch->f_range = lstub__branch_range(site, arm);
    branch->f_top = CAVITY_TOP;
    branch->lossless = branch->lossless && site->via.in.return_kind == LSTUB_RETURN_WALL && site->via.in.lid_distance > 0.0;
    if (site->fidelity == LSTUB_FIDELITY_LADDER) {
        const lstub__cav_barrel *shape = &branch->barrel->shape;
        branch->stated_error = lstub__ladder_valid(shape) ? LADDER_ERROR : LADDER_WIDE;
        status = made(lstub__ladder_make(shape, site->alloc.allocate, site->alloc.release, site->alloc.user, &branch->ladder), err);
        if (status < 0)
            lstub__branch_done(branch);
        return status;
    }
    branch->stated_error = NAN;
    status = compile(branch, site, site->annuli, &branch->cavity, err);
    if (status == LSTUB_OK) {
        cplx eps[LSTUB__CAV_MEDIA];
        lstub__barrel_media(branch->barrel, 1e9, eps);
        branch->f_top = fmin(branch->f_top, lstub__cavity_limit(branch->cavity, eps));
    } else {
        lstub__branch_done(branch);
    }
    return status;
}

int32_t lstub__branch_estimate(lstub__branch *branch, const lstub__site *site, lstub_error *err)
{
    branch->finer = site->annuli <= COARSE;
    return branch->cavity == NULL ? LSTUB_OK : compile(branch, site, site->annuli > COARSE ? COARSE : FINER, &branch->other, err);
}

void lstub__branch_done(lstub__branch *branch)
{
    lstub__cavity_destroy(branch->other);
    lstub__cavity_destroy(branch->cavity);
    lstub__ladder_free(branch->ladder);
    lstub__barrel_free(branch->barrel);
    branch->cavity = branch->other = NULL;
    branch->ladder = NULL;
    branch->barrel = NULL;
}

static cplx impedance(const void *model, double f)
{
    const lstub__branch *branch = model;
    cplx eps[LSTUB__CAV_MEDIA];
    lstub__barrel_media(branch->barrel, f, eps);
    return branch->cavity != NULL ? lstub__cavity_zin(branch->cavity, f, eps) : lstub__ladder_zin(branch->ladder, f, eps);
}

cplx lstub__branch_admittance(const lstub__branch *branch, double f)
{
    if (branch->barrel == NULL)
        return lstub__line_admittance(&branch->line, f);
    cplx z = impedance(branch, f);
    return cplx_norm(z) == 0.0 ? cplx_of(LSTUB__SHORT, 0.0) : cplx_div(cplx_of(1.0, 0.0), z);
}

double lstub__branch_notch(const lstub__branch *branch, double z_ref, double after, double f_max)
{
    if (branch->barrel == NULL)
        return lstub__line_notch(&branch->line, z_ref, after, f_max);
    double top = fmin(f_max, branch->f_top), expected = lstub__line_notch(&branch->line, z_ref, 0.0, LSTUB__F_MAX);
    double low = fmax(after * (1.0 + 1e-6), 1e8);
    if (low >= top)
        return HUGE_VAL;
    return lstub__notch_search(impedance, branch, z_ref, low, top, fmin(0.1 * expected, 5e9), LSTUB__BEND_FINE);
}

typedef struct other_view {
    lstub__branch branch;       /* with the other model in place of its own */
    double z_ref;
} other_view;

static double other_power(double f, const void *context)
{
    const other_view *c = context;
    return lstub__branches_power(&c->branch, 1, c->z_ref, f);
}

/* Half of what a coarse model is off, all of what a finer one is, and 2e-4 for what both share: covers 98 of 100 random
** cells (docs/theory.md). */
double lstub__branch_notch_error(const lstub__branch *branch, double z_ref, double f)
{
    const double reach = 0.05;
    if (branch->other == NULL)
        return branch->stated_error;
    other_view c = {*branch, z_ref};
    c.branch.cavity = branch->other;
    double low = f * (1.0 - reach), high = f * (1.0 + reach), found = lstub__dip(other_power, &c, low, high);
    int inside = found > low * (1.0 + 1e-3) && found < high * (1.0 - 1e-3);
    return (inside ? (branch->finer ? 1.0 : 0.5) * fabs(found / f - 1.0) : reach) + 2e-4;
}

/*
** The first one sooner: from a third of where the closed form has it, which is never off by that much, if the stub is
** still a capacitance there.
*/
static double first_notch(const lstub__branch *branch, double z_ref)
{
    double expected = lstub__line_notch(&branch->line, z_ref, 0.0, LSTUB__F_MAX), low = 0.35 * expected;
    if (branch->barrel == NULL)
        return expected;
    if (low < branch->f_top && impedance(branch, low).im < 0.0)
        return lstub__notch_search(impedance, branch, z_ref, low, branch->f_top, 0.15 * expected, LSTUB__BEND_COARSE);
    return lstub__branch_notch(branch, z_ref, 0.0, LSTUB__F_MAX);
}

/* ---- several ----------------------------------------------------------------------------------- */

cplx lstub__branches_admittance(const lstub__branch *branches, int32_t count, double f)
{
    cplx y = cplx_of(0.0, 0.0);
    for (int32_t i = 0; i < count; i++)
        y = cplx_add(y, lstub__branch_admittance(&branches[i], f));
    return y;
}

/* S21 = 2/(2 + Z0 Y). */
double lstub__branches_power(const lstub__branch *branches, int32_t count, double z_ref, double f)
{
    cplx y = lstub__branches_admittance(branches, count, f);
    return 4.0 / cplx_norm(cplx_of(2.0 + z_ref * y.re, z_ref * y.im));
}

double lstub__branches_loss_db(const lstub__branch *branches, int32_t count, double z_ref, double f)
{
    double loss = -10.0 * log10(lstub__branches_power(branches, count, z_ref, f));
    if (loss < 0.0)                    /* rounding of a stub that does nothing; a gain is an error, and fails every criterion */
        return loss > -1e-3 ? 0.0 : NAN;
    return loss > LSTUB__LOSS_MOST ? LSTUB__LOSS_MOST : loss;    /* a NaN stays one */
}

double lstub__branches_first_notch(const lstub__branch *branches, int32_t count, double z_ref, int32_t *which)
{
    double f1 = HUGE_VAL;
    *which = -1;
    for (int32_t i = 0; i < count; i++) {
        double f = first_notch(&branches[i], z_ref);
        if (f < f1) {
            f1 = f;
            *which = i;
        }
    }
    return f1;
}

int32_t lstub__branches_make(lstub__branch *branches, int32_t *count, const lstub__site *site, double top, double bottom,
                             lstub_error *err)
{
    const double length[2] = {top, bottom};
    *count = 0;
    for (int arm = 0; arm < 2; arm++) {
        if (length[arm] <= LSTUB__SLACK)
            continue;
        int32_t status = lstub__branch_make(&branches[*count], site, arm, length[arm], err);
        if (status < 0) {
            lstub__branches_done(branches, *count);
            *count = 0;
            return status;
        }
        ++*count;
    }
    return LSTUB_OK;
}

void lstub__branches_done(lstub__branch *branches, int32_t count)
{
    for (int32_t i = 0; i < count; i++)
        lstub__branch_done(&branches[i]);
}
