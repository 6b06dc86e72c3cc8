/* Measurements of our own making: a channel of launches, lossy lines and a via's stub across it, with noise. */
#ifndef CHECK_MEASURE_H
#define CHECK_MEASURE_H

#include "check_model.h"

#include <complex.h>

typedef double _Complex complex_number;

#define SAMPLES_MOST 4096

typedef struct channel {         /* launch, line, stub, line, launch, between z0                          */
    double z0;
    double launch[2];            /* F across the line at its ends                                         */
    double line_z[2];            /* ohm                                                                   */
    double delay[2];             /* s                                                                     */
    double loss_root, loss_f;    /* dB of the whole at f_ref, sqrt f and f parts                          */
    double f_ref;
    double noise;                /* rms of |S|, each of re and im over sqrt 2                             */
} channel;

typedef struct measured {
    size_t n;
    double f[SAMPLES_MOST], s[2 * SAMPLES_MOST];
} measured;

typedef struct abcd { complex_number a, b, c, d; } abcd;

static inline abcd times(abcd x, abcd y)
{
    return (abcd){x.a * y.a + x.b * y.c, x.a * y.b + x.b * y.d, x.c * y.a + x.d * y.c, x.c * y.b + x.d * y.d};
}

static inline abcd shunt(complex_number y) { return (abcd){1.0, 0.0, y, 1.0}; }

static inline abcd line(const channel *c, int which, double f)
{
    double share = c->delay[which] / (c->delay[0] + c->delay[1]), x = f / c->f_ref;
    double neper = (c->loss_root * sqrt(x) + c->loss_f * x) / 8.685889638 * share;
    complex_number g = neper + I * 2.0 * PI * f * c->delay[which], z = c->line_z[which];
    return (abcd){ccosh(g), z * csinh(g), csinh(g) / z, ccosh(g)};
}

/* Two of a normal distribution (Box, Muller). */
static inline complex_number normal_pair(uint64_t seed, uint64_t n)
{
    double u = 1.0 - test_random(seed, 2 * n), v = test_random(seed, 2 * n + 1);
    return sqrt(-2.0 * log(u)) * cexp(I * 2.0 * PI * v);
}

/* S21 of the channel at m->f; stub_s21: of the stub alone on z0 (lstub_model_s21), null: none. */
static inline void measure(const channel *c, const double *stub_s21, uint64_t seed, measured *m)
{
    for (size_t i = 0; i < m->n; i++) {
        double f = m->f[i];
        abcd t = times(shunt(I * 2.0 * PI * f * c->launch[0]), line(c, 0, f));
        if (stub_s21 != NULL)
            t = times(t, shunt((2.0 / (stub_s21[2 * i] + I * stub_s21[2 * i + 1]) - 2.0) / c->z0));
        t = times(times(t, line(c, 1, f)), shunt(I * 2.0 * PI * f * c->launch[1]));
        complex_number s = 2.0 / (t.a + t.b / c->z0 + t.c * c->z0 + t.d) + c->noise / sqrt(2.0) * normal_pair(seed, i);
        m->s[2 * i] = creal(s);
        m->s[2 * i + 1] = cimag(s);
    }
}

/* Between two values, evenly or (times) in the logarithm. */
static inline double between(double low, double high, uint64_t seed, uint64_t n) { return low + (high - low) * test_random(seed, n); }
static inline double decades(double low, double high, uint64_t seed, uint64_t n) { return low * pow(high / low, test_random(seed, n)); }

/* A bench, drawn: the band ends at f_top. */
static inline channel random_channel(uint64_t seed, uint64_t i, double f_top, measured *m)
{
    channel c;
    uint64_t k = 100 * i;
    c.z0 = 50.0;
    for (int e = 0; e < 2; e++) {
        c.launch[e] = between(0.0, 0.5, seed, k++) / (c.z0 * 2.0 * PI * f_top);     /* mismatch up to |S11| = 0.24 at the top */
        c.line_z[e] = between(46.0, 54.0, seed, k++);
        c.delay[e] = decades(0.05e-9, 1.5e-9, seed, k++);
    }
    c.f_ref = f_top;
    double loss = between(2.0, 30.0, seed, k++), part = between(0.2, 0.8, seed, k++);
    c.loss_root = loss * part;
    c.loss_f = loss * (1.0 - part);
    c.noise = pow(10.0, between(-90.0, -55.0, seed, k++) / 20.0);
    m->n = (size_t)between(800.0, 2400.0, seed, k++);
    double bottom = between(0.0005, 0.02, seed, k++) * f_top, uneven = between(0.0, 0.4, seed, k++);
    for (size_t j = 0; j < m->n; j++) {
        double x = (double)j / (double)(m->n - 1);
        m->f[j] = bottom + (f_top - bottom) * (x + uneven * x * (x - 1.0));         /* denser at the bottom: steps 0.6 to 1.4 */
    }
    return c;
}

#endif
