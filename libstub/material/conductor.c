#include "material/conductor.h"

#include <math.h>

double lstub__skin_depth(double conductivity, double f)
{
    return sqrt(1.0 / (LSTUB_PI * f * LSTUB_MU0 * conductivity));
}

/*
** atan X + ln((1 + X)/sqrt(1 + X^2)) for X = (1 + j) x. The three logarithms are those of (1 + x) + jx, its conjugate and
** (1 - x) + jx.
*/
static cplx hammerstad(double x)
{
    double size = 0.5 * log1p(4.0 * x / (1.0 + 2.0 * x * (x - 1.0)));    /* ln |1 + X| / |1 + jX| */
    double near = atan2(x, 1.0 + x), far = atan2(x, 1.0 - x);
    return cplx_of(0.5 * (size + near + far), 0.5 * (size + 3.0 * near - far));
}

cplx lstub__roughness(const lstub_conductor *taken, double depth)
{
    if (taken->roughness == 0.0)
        return cplx_of(0.0, 0.0);
    if (taken->roughness_law == LSTUB_ROUGHNESS_SPHERES) {
        double x = 0.06 * 2.0 * sqrt(3.0) * taken->roughness / depth;
        cplx X = cplx_of(x, x);
        return cplx_scale(cplx_div(X, cplx_of(1.0 + x, x)), 84.0 * LSTUB_PI / 36.0);
    }
    return cplx_scale(hammerstad(sqrt(0.7) * taken->roughness / depth), 2.0 / LSTUB_PI);
}

cplx lstub__surface_impedance(const lstub_conductor *taken, double f)
{
    double depth = lstub__skin_depth(taken->conductivity, f), rs = 1.0 / (taken->conductivity * depth);
    cplx k = lstub__roughness(taken, depth);
    return cplx_mul(cplx_of(rs, rs), cplx_of(1.0 + k.re, k.im));
}

static const lstub__range FREQUENCY = {1e3, 1e12, 0, "Hz"};

int32_t lstub_skin_depth(double conductivity, double f, double *depth, lstub_error *err)
{
    static const lstub__range CONDUCTIVITY = {1e5, 1e8, 0, "S/m"};
    int32_t status;
    if (lstub__need(depth, "depth", err) < 0)
        return LSTUB_E_NULL;
    if ((status = lstub__check(conductivity, &CONDUCTIVITY, "conductivity", err)) < 0
        || (status = lstub__check(f, &FREQUENCY, "f", err)) < 0)
        return status;
    *depth = lstub__skin_depth(conductivity, f);
    return LSTUB_OK;
}

int32_t lstub_conductor_surface_impedance(const lstub_conductor *conductor, const double *freq, size_t n, double *z,
                                          lstub_error *err)
{
    lstub_conductor ours;
    int32_t status = lstub__conductor_take(&ours, conductor, err);
    if (status < 0)
        return status;
    if (n > 0 && (lstub__need(freq, "freq", err) < 0 || lstub__need(z, "z", err) < 0))
        return LSTUB_E_NULL;
    for (size_t i = 0; i < n; i++)
        if ((status = lstub__check(freq[i], &FREQUENCY, "freq", err)) < 0) {
            lstub__fail_where(err, (int64_t)i, "item %lu", (unsigned long)i);
            return status;
        }
    for (size_t i = 0; i < n; i++) {
        cplx zs = lstub__surface_impedance(&ours, freq[i]);
        z[2 * i] = zs.re;
        z[2 * i + 1] = zs.im;
    }
    return LSTUB_OK;
}
