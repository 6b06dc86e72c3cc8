/* Complex numbers: a plain struct, so that nothing depends on C99 complex and its compilers. */
#ifndef LSTUB_CPLX_H
#define LSTUB_CPLX_H

#include <math.h>

typedef struct cplx {
    double re, im;
} cplx;

static inline cplx cplx_of(double re, double im) { cplx z = {re, im}; return z; }
static inline cplx cplx_add(cplx a, cplx b) { return cplx_of(a.re + b.re, a.im + b.im); }
static inline cplx cplx_sub(cplx a, cplx b) { return cplx_of(a.re - b.re, a.im - b.im); }
static inline cplx cplx_mul(cplx a, cplx b) { return cplx_of(a.re * b.re - a.im * b.im, a.re * b.im + a.im * b.re); }
static inline cplx cplx_scale(cplx a, double s) { return cplx_of(a.re * s, a.im * s); }
static inline cplx cplx_neg(cplx a) { return cplx_of(-a.re, -a.im); }
static inline cplx cplx_conj(cplx a) { return cplx_of(a.re, -a.im); }
static inline cplx cplx_fma(cplx a, cplx b, cplx c)    /* a + b c */
{
    return cplx_of(a.re + b.re * c.re - b.im * c.im, a.im + b.re * c.im + b.im * c.re);
}
static inline cplx cplx_fms(cplx a, cplx b, cplx c)    /* a - b c */
{
    return cplx_of(a.re - b.re * c.re + b.im * c.im, a.im - b.re * c.im - b.im * c.re);
}
static inline double cplx_norm(cplx a) { return a.re * a.re + a.im * a.im; }    /* |a|^2 */
static inline double cplx_abs(cplx a) { return hypot(a.re, a.im); }

/* Sooner than cplx_div, for numbers whose square neither over- nor underflows. */
static inline cplx cplx_inv(cplx a)
{
    double d = 1.0 / cplx_norm(a);
    return cplx_of(a.re * d, -a.im * d);
}
static inline cplx cplx_exp(cplx a)
{
    double e = exp(a.re);
    return cplx_of(e * cos(a.im), e * sin(a.im));
}
static inline cplx cplx_log(cplx a) { return cplx_of(0.5 * log(cplx_norm(a)), atan2(a.im, a.re)); }

/* Smith's division: no overflow in the middle. */
static inline cplx cplx_div(cplx a, cplx b)
{
    if (fabs(b.re) >= fabs(b.im)) {
        double r = b.im / b.re, d = b.re + b.im * r;
        return cplx_of((a.re + a.im * r) / d, (a.im - a.re * r) / d);
    } else {
        double r = b.re / b.im, d = b.re * r + b.im;
        return cplx_of((a.re * r + a.im) / d, (a.im * r - a.re) / d);
    }
}

/* Principal root, re >= 0. */
static inline cplx cplx_sqrt(cplx a)
{
    double m = hypot(a.re, a.im), r = sqrt(0.5 * (m + fabs(a.re)));
    if (r == 0.0)
        return cplx_of(0.0, 0.0);
    if (a.re >= 0.0)
        return cplx_of(r, a.im / (2.0 * r));
    return cplx_of(fabs(a.im) / (2.0 * r), a.im < 0.0 ? -r : r);
}

/* tanh(x + jy) = (sinh 2x + j sin 2y)/(cosh 2x + cos 2y), written so that large x does not overflow. */
static inline cplx cplx_tanh(cplx a)
{
    double e = exp(-2.0 * fabs(a.re)), s = sin(a.im), c = cos(a.im);
    double d = (1.0 - e) * (1.0 - e) + 4.0 * e * c * c;   /* 2 e (cosh 2x + cos 2y) */
    double re = (1.0 - e * e) / d, im = 4.0 * e * s * c / d;
    return cplx_of(a.re < 0.0 ? -re : re, im);
}

#endif
