/* What all networks share: division with its condition, checked input, batches. */
#include "network/network.h"
#include "num/dense.h"

#include <math.h>
#include <string.h>

#define CONDITION_WARN 1e10    /* fewer than 6 of 16 digits left */
#define CONDITION_FAIL 1e14    /* what rounding leaves of a singular matrix of 16 ports is beyond this */
#define LARGEST        1e30    /* of the data: so no square of a product overflows */

static const lstub__range OHM = {1e-6, 1e9, 0, "ohm"};

/* Largest row sum of |a| |b|, m x m. */
static double norm_of_product(const double *a, const double *b, int m)
{
    double most = 0.0;
    for (int i = 0; i < m; i++) {
        double sum = 0.0;
        for (int k = 0; k < m; k++)
            for (int j = 0; j < m; j++)
                sum += a[i * m + k] * b[k * m + j];
        if (!(sum <= most))
            most = sum;
    }
    return most;
}

/* den X = num with the inverse solved for beside it. */
static double divide(const cplx *den, const double *size, int m, const cplx *num, int count, cplx *x, int right)
{
    cplx a[LSTUB__PORTS2], b[3 * LSTUB__PORTS2];
    double terms[LSTUB__PORTS2], inverse[LSTUB__PORTS2];
    int stride = count + m;
    for (int i = 0; i < m; i++) {
        for (int j = 0; j < m; j++) {
            a[i * m + j] = right ? den[j * m + i] : den[i * m + j];
            b[i * stride + count + j] = cplx_of(i == j, 0.0);
            terms[i * m + j] = size != NULL ? size[i * m + j] : cplx_abs(den[i * m + j]);
        }
        for (int j = 0; j < count; j++)
            b[i * stride + j] = right ? num[j * m + i] : num[i * count + j];
    }
    if (lstub__zsolve(a, m, m, b, stride, stride) < 0)
        return HUGE_VAL;
    for (int i = 0; i < m; i++) {
        for (int j = 0; j < count; j++)
            x[right ? j * m + i : i * count + j] = b[i * stride + j];
        for (int j = 0; j < m; j++)
            inverse[right ? j * m + i : i * m + j] = cplx_abs(b[i * stride + count + j]);
    }
    return right ? norm_of_product(terms, inverse, m) : norm_of_product(inverse, terms, m);
}

double lstub__left_divide(const cplx *den, const double *size, int m, const cplx *num, int count, cplx *x)
{
    return divide(den, size, m, num, count, x, 0);
}

double lstub__right_divide(const cplx *den, const double *size, int m, const cplx *num, int count, cplx *x)
{
    return divide(den, size, m, num, count, x, 1);
}

int32_t lstub__net_judge(double condition, const char *what, lstub_error *err)
{
    if (condition <= CONDITION_WARN)
        return LSTUB_OK;
    if (!(condition <= CONDITION_FAIL))
        return lstub__fail(err, LSTUB_E_NONE, what, -1, "%s: singular (condition %.3g, must be <= %g)", what, condition, CONDITION_FAIL);
    return lstub__fail(err, LSTUB_W_RANGE, what, -1, "%s: nearly singular (condition %.3g): about %d digits are left", what, condition,
                       (int)(15.6 - log10(condition)));
}

int32_t lstub__net_ports(int32_t p, int even, lstub_error *err)
{
    if (p >= 1 && p <= LSTUB_PORTS_MAX && (!even || p % 2 == 0))
        return LSTUB_OK;
    return lstub__fail(err, LSTUB_E_ARGUMENT, "p", -1, "p = %ld ports: must be >= 1 and <= %d%s", (long)p, LSTUB_PORTS_MAX,
                       even ? ", and even" : "");
}

int32_t lstub__net_references(const double *z, int32_t p, const char *field, lstub_error *err)
{
    int32_t status = lstub__need(z, field, err);
    for (int32_t i = 0; status == LSTUB_OK && i < p; i++)
        if ((status = lstub__check(z[i], &OHM, field, err)) < 0)
            lstub__fail_where(err, i, "port %ld", (long)i);
    return status;
}

int32_t lstub__net_frequencies(const double *freq, size_t n, lstub_error *err)
{
    static const lstub__range BAND = {0.0, 1e12, 0, "Hz"};
    int32_t status = lstub__need(freq, "freq", err);
    for (size_t i = 0; status == LSTUB_OK && i < n; i++) {
        if ((status = lstub__check(freq[i], &BAND, "freq", err)) < 0)
            lstub__fail_where(err, (int64_t)i, "item %lu", (unsigned long)i);
        else if (i > 0 && !(freq[i] > freq[i - 1]))
            status = lstub__fail(err, LSTUB_E_ARGUMENT, "freq", (int64_t)i, "freq[%lu] = %.9g Hz: must be > freq[%lu] = %.9g Hz",
                                 (unsigned long)i, freq[i], (unsigned long)(i - 1), freq[i - 1]);
    }
    return status;
}

int32_t lstub__net_load(const double *s, size_t i, int32_t p, const char *field, cplx *out, lstub_error *err)
{
    size_t count = (size_t)p * (size_t)p;
    const double *from = s + 2 * count * i;
    for (size_t k = 0; k < count; k++) {
        out[k] = cplx_of(from[2 * k], from[2 * k + 1]);
        if (!(fabs(out[k].re) <= LARGEST && fabs(out[k].im) <= LARGEST))
            return lstub__fail(err, LSTUB_E_ARGUMENT, field, (int64_t)i, "%s[%lu, %lu, %lu] = %g%+gj: must be finite and <= %g", field,
                               (unsigned long)i, (unsigned long)(k / (size_t)p), (unsigned long)(k % (size_t)p), out[k].re, out[k].im, LARGEST);
    }
    return LSTUB_OK;
}

void lstub__net_store(const cplx *s, int32_t p, double *out)
{
    for (int32_t k = 0; k < p * p; k++) {
        out[2 * k] = s[k].re;
        out[2 * k + 1] = s[k].im;
    }
}

static int all_finite(const double *x, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (!isfinite(x[i]))
            return 0;
    return 1;
}

int32_t lstub__net_each(lstub__net_item *item, const void *context, size_t n, size_t width, double *out, int32_t *status, lstub_error *err)
{
    lstub__batch batch = {0, 0};
    for (size_t i = 0; i < n; i++) {
        double *here = out + i * width;
        lstub_error one;
        LSTUB_INIT(one);
        int32_t result = item(context, i, here, &one);
        if (result >= 0 && !all_finite(here, width))
            result = lstub__fail(&one, LSTUB_E_ARGUMENT, "out", -1, "the values are too large or too small to compute with");
        if (result < 0)
            for (size_t k = 0; k < width; k++)
                here[k] = NAN;
        if (status != NULL)
            status[i] = result;
        lstub__batch_add(&batch, result, (int64_t)i, &one, err);
    }
    return batch.result;
}
