#include "material/material.h"

#include <math.h>

#define F_LOW  1e3     /* Hz, first and last relaxation of the wideband model, usual choice */
#define F_HIGH 1e12

int32_t lstub__dielectric_take(lstub_dielectric *ours, const lstub_dielectric *theirs, lstub_error *err)
{
    static const lstub__range DK = {1.0, 1000.0, 0, ""}, RATIO = {0.5, 2.0, 0, ""}, LOSS = {0.0, 0.5, 0, ""},
                              F_REF = {1e5, 1e11, 0, "Hz"};
    int32_t status = lstub__take(ours, sizeof *ours, theirs, sizeof *ours, "dielectric", err);
    if (status < 0)
        return status;
    if (ours->in_plane_ratio == 0.0)
        ours->in_plane_ratio = 1.0;
    if (ours->f_ref == 0.0)
        ours->f_ref = 1e9;
    if ((status = lstub__check(ours->dk, &DK, "dk", err)) < 0
        || (status = lstub__check(ours->in_plane_ratio, &RATIO, "in_plane_ratio", err)) < 0
        || (status = lstub__check(ours->loss_tangent, &LOSS, "loss_tangent", err)) < 0
        || (status = lstub__check(ours->f_ref, &F_REF, "f_ref", err)) < 0)
        return status;
    return LSTUB_OK;
}

int32_t lstub__conductor_take(lstub_conductor *ours, const lstub_conductor *theirs, lstub_error *err)
{
    static const lstub__range CONDUCTIVITY = {1e5, 1e8, 0, "S/m"}, ROUGHNESS = {0.0, 20e-6, 0, "m"};
    int32_t status = lstub__take(ours, sizeof *ours, theirs, offsetof(lstub_conductor, roughness_law), "conductor", err);
    if (status < 0)
        return status;
    if (ours->reserved != 0)
        return lstub__fail(err, LSTUB_E_SIZE, "reserved", -1, "reserved = %ld: must be 0", (long)ours->reserved);
    if (ours->roughness_law != LSTUB_ROUGHNESS_HAMMERSTAD && ours->roughness_law != LSTUB_ROUGHNESS_SPHERES)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "roughness_law", -1, "roughness_law = %ld: must be 0 (HAMMERSTAD) or 1 (SPHERES)",
                           (long)ours->roughness_law);
    if (ours->conductivity == 0.0)
        ours->conductivity = 5.8e7;
    if ((status = lstub__check(ours->conductivity, &CONDUCTIVITY, "conductivity", err)) < 0
        || (status = lstub__check(ours->roughness, &ROUGHNESS, "roughness", err)) < 0)
        return status;
    return LSTUB_OK;
}

cplx lstub__wideband_lambda(double f)
{
    cplx ratio = cplx_div(cplx_of(F_HIGH, f), cplx_of(F_LOW, f));
    return cplx_of(0.5 * log(cplx_norm(ratio)), atan2(ratio.im, ratio.re));
}

lstub__wideband lstub__wideband_of(const lstub_dielectric *dielectric)
{
    cplx k = lstub__wideband_lambda(dielectric->f_ref);
    lstub__wideband w;
    w.slope = -dielectric->dk * dielectric->loss_tangent / k.im;
    w.constant = dielectric->dk * (1.0 + dielectric->loss_tangent * k.re / k.im);
    return w;
}

/* Re lambda = ln((f2^2 + f^2)/(f1^2 + f^2))/2 falls with f: solved for f. */
double lstub__wideband_top(lstub__wideband w)
{
    double ratio = w.slope > 0.0 ? exp(2.0 * (1.0 - w.constant) / w.slope) : 0.0;
    return ratio > 1.0 ? sqrt(fmax(F_HIGH * F_HIGH - F_LOW * F_LOW * ratio, 0.0) / (ratio - 1.0)) : HUGE_VAL;
}

cplx lstub__wideband_at(lstub__wideband w, cplx lambda)
{
    return cplx_of(w.constant + w.slope * lambda.re, w.slope * lambda.im);
}

int32_t lstub_dielectric_permittivity(const lstub_dielectric *dielectric, const double *freq, size_t n,
                                      double *through_plane, double *in_plane, lstub_error *err)
{
    static const lstub__range FREQUENCY = {F_LOW, F_HIGH, 0, "Hz"};
    lstub_dielectric ours;
    int32_t status = lstub__dielectric_take(&ours, dielectric, err);
    if (status < 0)
        return status;
    if (n > 0 && lstub__need(freq, "freq", err) < 0)
        return LSTUB_E_NULL;
    for (size_t i = 0; i < n; i++)
        if ((status = lstub__check(freq[i], &FREQUENCY, "freq", err)) < 0) {
            lstub__fail_where(err, (int64_t)i, "item %lu", (unsigned long)i);
            return status;
        }
    lstub__wideband w = lstub__wideband_of(&ours);
    for (size_t i = 0; i < n; i++) {
        cplx eps = lstub__wideband_at(w, lstub__wideband_lambda(freq[i]));
        if (through_plane != NULL) {
            through_plane[2 * i] = eps.re;
            through_plane[2 * i + 1] = eps.im;
        }
        if (in_plane != NULL) {
            in_plane[2 * i] = eps.re * ours.in_plane_ratio;
            in_plane[2 * i + 1] = eps.im * ours.in_plane_ratio;
        }
        if (eps.re < 1.0 && status == LSTUB_OK)
            status = lstub__fail(err, LSTUB_W_RANGE, "loss_tangent", (int64_t)i, "loss_tangent = %.6g: Dk falls below 1 above %.6g Hz",
                                 ours.loss_tangent, lstub__wideband_top(w));
    }
    return status;
}
