#include "model/branch.h"

#include <math.h>

int32_t lstub__branch_make(lstub__branch *branch, const lstub__site *site, int arm, double length, lstub_error *err)
{
    (void)err;
    branch->fidelity = site->fidelity;
    branch->length = length;
    lstub__site_line(site, arm, length, &branch->line);
    branch->lossless = branch->line.lossless;
    branch->f_range = branch->line.f_range;
    branch->stated_error = branch->line.stated_error;
    return LSTUB_OK;
}

void lstub__branch_done(lstub__branch *branch) { (void)branch; }

cplx lstub__branch_admittance(const lstub__branch *branch, double f) { return lstub__line_admittance(&branch->line, f); }

double lstub__branch_notch(const lstub__branch *branch, double z_ref, double after, double f_max)
{
    return lstub__line_notch(&branch->line, z_ref, after, f_max);
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
    if (loss < 0.0)                    /* rounding of a stub that does nothing */
        return 0.0;
    return loss > LSTUB__LOSS_MOST ? LSTUB__LOSS_MOST : loss;    /* a NaN stays one */
}

double lstub__branches_first_notch(const lstub__branch *branches, int32_t count, double z_ref, int32_t *which)
{
    double f1 = HUGE_VAL;
    *which = -1;
    for (int32_t i = 0; i < count; i++) {
        double f = lstub__branch_notch(&branches[i], z_ref, 0.0, LSTUB__F_MAX);
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
        if (length[arm] <= 0.0)
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
