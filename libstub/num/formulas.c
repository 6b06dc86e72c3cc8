/* The published closed forms of the header: each checks its arguments and is one line of mathematics. */
#include "base/base.h"
#include "num/bessel.h"
#include "num/root.h"

#include <math.h>

static const lstub__range LENGTH = {0.0, 10.0, 1, "m"};
static const lstub__range FREQUENCY = {0.0, 1e15, 1, "Hz"};
static const lstub__range DK = {1.0, 1000.0, 0, ""};
static const lstub__range IMPEDANCE = {0.0, 1e5, 1, "ohm"};

/* Checks one argument and leaves the function that has `err`. */
#define CHECK(value, range)                                              \
    do {                                                                 \
        int32_t check_ = lstub__check(value, &(range), #value, err);     \
        if (check_ < 0)                                                  \
            return check_;                                               \
    } while (0)

#define NEED(pointer)                                       \
    do {                                                    \
        if (lstub__need(pointer, #pointer, err) < 0)        \
            return LSTUB_E_NULL;                            \
    } while (0)

static int32_t check_odd(int32_t n, lstub_error *err)
{
    if (n >= 1 && n % 2 == 1 && n < 100000)
        return LSTUB_OK;
    return lstub__fail(err, LSTUB_E_ARGUMENT, "n", -1, "n = %ld: must be odd, >= 1 and < 100000", (long)n);
}

int32_t lstub_quarter_wave_frequency(double length, double dk, int32_t n, double *f, lstub_error *err)
{
    CHECK(length, LENGTH);
    CHECK(dk, DK);
    if (check_odd(n, err) < 0)
        return LSTUB_E_ARGUMENT;
    NEED(f);
    *f = n * LSTUB_C0 / (4.0 * length * sqrt(dk));
    return LSTUB_OK;
}

int32_t lstub_quarter_wave_length(double f, double dk, int32_t n, double *length, lstub_error *err)
{
    CHECK(f, FREQUENCY);
    CHECK(dk, DK);
    if (check_odd(n, err) < 0)
        return LSTUB_E_ARGUMENT;
    NEED(length);
    *length = n * LSTUB_C0 / (4.0 * f * sqrt(dk));
    return LSTUB_OK;
}

int32_t lstub_quarter_wave_dk(double f, double length, int32_t n, double *dk, lstub_error *err)
{
    CHECK(f, FREQUENCY);
    CHECK(length, LENGTH);
    if (check_odd(n, err) < 0)
        return LSTUB_E_ARGUMENT;
    NEED(dk);
    double root = n * LSTUB_C0 / (4.0 * length * f);
    *dk = root * root;
    if (*dk < 1.0)
        return lstub__fail(err, LSTUB_W_RANGE, "dk", -1, "dk = %.6g from f and length: a wave faster than light", *dk);
    return LSTUB_OK;
}

int32_t lstub_delay_dk(double delay, double *dk, lstub_error *err)
{
    static const lstub__range DELAY = {0.0, 1e-6, 1, "s/m"};
    CHECK(delay, DELAY);
    NEED(dk);
    *dk = LSTUB_C0 * delay * LSTUB_C0 * delay;
    if (*dk < 1.0)
        return lstub__fail(err, LSTUB_W_RANGE, "dk", -1, "dk = %.6g from delay: a wave faster than light", *dk);
    return LSTUB_OK;
}

int32_t lstub_loaded_stub_frequency(double length, double dk, double zs, double end_capacitance, int32_t n,
                                    double *f, lstub_error *err)
{
    static const lstub__range CAPACITANCE = {0.0, 1e-6, 0, "F"};
    CHECK(length, LENGTH);
    CHECK(dk, DK);
    CHECK(zs, IMPEDANCE);
    CHECK(end_capacitance, CAPACITANCE);
    if (n < 1 || n > 100000)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "n", -1, "n = %ld: must be >= 1 and <= 100000", (long)n);
    NEED(f);
    double delay = length * sqrt(dk) / LSTUB_C0;
    double theta = lstub__open_stub_angle(end_capacitance * zs / delay, n);
    *f = theta / (2.0 * LSTUB_PI * delay);
    return LSTUB_OK;
}

int32_t lstub_notch_floor(double zs, double z0, double loss_tangent, int32_t n, double *db, lstub_error *err)
{
    static const lstub__range LOSSY = {0.0, 0.5, 1, ""};
    CHECK(zs, IMPEDANCE);
    CHECK(z0, IMPEDANCE);
    CHECK(loss_tangent, LOSSY);
    if (check_odd(n, err) < 0)
        return LSTUB_E_ARGUMENT;
    NEED(db);
    double t = 2.0 * zs * tanh(n * LSTUB_PI * loss_tangent / 4.0);
    *db = 20.0 * log10(t / (t + z0));
    return LSTUB_OK;
}

int32_t lstub_stub_skirt(double zs, double z0, double f_over_f1, double *db, lstub_error *err)
{
    static const lstub__range SKIRT = {0.0, 0.999999, 0, ""};
    CHECK(zs, IMPEDANCE);
    CHECK(z0, IMPEDANCE);
    CHECK(f_over_f1, SKIRT);
    NEED(db);
    double t = z0 * tan(0.5 * LSTUB_PI * f_over_f1) / (2.0 * zs);
    *db = 10.0 * log10(1.0 + t * t);
    return LSTUB_OK;
}

int32_t lstub_rule_of_thumb_length(double bit_rate, double *length, lstub_error *err)
{
    static const lstub__range RATE = {0.0, 1e15, 1, "b/s"};
    CHECK(bit_rate, RATE);
    NEED(length);
    *length = 0.0254 * 0.3e9 / bit_rate;
    return LSTUB_OK;
}

int32_t lstub_coax(double inner_diameter, double outer_diameter, double dk, double *capacitance, double *inductance,
                   double *impedance, lstub_error *err)
{
    CHECK(inner_diameter, LENGTH);
    CHECK(outer_diameter, LENGTH);
    CHECK(dk, DK);
    if (outer_diameter <= inner_diameter)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "outer_diameter", -1,
                           "outer_diameter = %.9g m: must be > inner_diameter = %.9g m", outer_diameter, inner_diameter);
    double log_ratio = log(outer_diameter / inner_diameter);
    if (capacitance != NULL)
        *capacitance = 2.0 * LSTUB_PI * LSTUB_EPS0 * dk / log_ratio;
    if (inductance != NULL)
        *inductance = LSTUB_MU0 / (2.0 * LSTUB_PI) * log_ratio;
    if (impedance != NULL)
        *impedance = LSTUB_ETA0 / (2.0 * LSTUB_PI * sqrt(dk)) * log_ratio;
    return LSTUB_OK;
}

int32_t lstub_return_inductance(double drill, int32_t count, double distance, double return_drill,
                                double *inductance, lstub_error *err)
{
    CHECK(drill, LENGTH);
    CHECK(distance, LENGTH);
    CHECK(return_drill, LENGTH);
    if (count < 1 || count > 1000)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "count", -1, "count = %ld: must be >= 1 and <= 1000", (long)count);
    NEED(inductance);
    if (distance <= 0.5 * (drill + return_drill))
        return lstub__fail(err, LSTUB_E_GEOMETRY, "distance", -1,
                           "distance = %.9g m: return vias of %.9g m touch the barrel of %.9g m", distance, return_drill, drill);
    if (count > 1 && 2.0 * distance * sin(LSTUB_PI / count) <= return_drill)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "count", -1,
                           "count = %ld: return vias of %.9g m touch each other at a distance of %.9g m", (long)count,
                           return_drill, distance);
    *inductance = LSTUB_MU0 / (2.0 * LSTUB_PI)
                  * (log(2.0 * distance / drill) + log(2.0 * distance / (count * return_drill)) / count);
    return LSTUB_OK;
}

int32_t lstub_twin_rod(double drill, double pitch, double dk, double *odd_inductance, double *differential_impedance,
                       lstub_error *err)
{
    CHECK(drill, LENGTH);
    CHECK(pitch, LENGTH);
    CHECK(dk, DK);
    if (pitch <= drill)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "pitch", -1, "pitch = %.9g m: must be > drill = %.9g m", pitch, drill);
    double spread = acosh(pitch / drill);
    if (odd_inductance != NULL)
        *odd_inductance = LSTUB_MU0 / (2.0 * LSTUB_PI) * spread;
    if (differential_impedance != NULL)
        *differential_impedance = LSTUB_ETA0 / (LSTUB_PI * sqrt(dk)) * spread;
    return LSTUB_OK;
}

/*
** The sum of 1/kappa^2 over odd modes is e_rho h^2/(8 e_z) exactly; what is left, K0 ratios, falls as exp(-kappa (b-a)).
*/
int32_t lstub_plate_capacitance(double drill, double antipad, double spacing, double dk_through_plane,
                                double dk_in_plane, double *capacitance, lstub_error *err)
{
    CHECK(drill, LENGTH);
    CHECK(antipad, LENGTH);
    CHECK(spacing, LENGTH);
    CHECK(dk_through_plane, DK);
    CHECK(dk_in_plane, DK);
    NEED(capacitance);
    if (antipad <= drill)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "antipad", -1, "antipad = %.9g m: must be > drill = %.9g m", antipad, drill);
    double a = 0.5 * drill, b = 0.5 * antipad, most = 8000.0 * sqrt(dk_through_plane / dk_in_plane) * (antipad - drill);
    if (spacing > most)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "spacing", -1, "spacing = %.9g m: must be <= %.9g m, some 8000 times "
                           "antipad - drill", spacing, most);
    double step = sqrt(dk_through_plane / dk_in_plane) * LSTUB_PI / spacing;
    double sum = spacing * spacing * dk_in_plane / (8.0 * dk_through_plane);
    for (int m = 1; m * step * (b - a) < 36.0; m += 2) {
        double kappa = m * step;
        double i0, k0_a, k0_b;          /* scaled by exp(x) */
        lstub__bessel_ik0(kappa * a, &i0, &k0_a);
        lstub__bessel_ik0(kappa * b, &i0, &k0_b);
        sum -= k0_b / k0_a * exp(-kappa * (b - a)) / (kappa * kappa);
    }
    *capacitance = 8.0 * LSTUB_PI * LSTUB_EPS0 * dk_through_plane / (spacing * log(b / a)) * sum;
    return LSTUB_OK;
}

int32_t lstub_handbook_capacitance(double thickness, double pad, double antipad, double dk, double *capacitance,
                                   lstub_error *err)
{
    CHECK(thickness, LENGTH);
    CHECK(pad, LENGTH);
    CHECK(antipad, LENGTH);
    CHECK(dk, DK);
    NEED(capacitance);
    if (antipad <= pad)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "antipad", -1, "antipad = %.9g m: must be > pad = %.9g m", antipad, pad);
    *capacitance = 1.41e-12 / 0.0254 * dk * thickness * pad / (antipad - pad);
    return LSTUB_OK;
}

int32_t lstub_handbook_inductance(double length, double diameter, double *inductance, lstub_error *err)
{
    CHECK(length, LENGTH);
    CHECK(diameter, LENGTH);
    NEED(inductance);
    double spread = log(4.0 * length / diameter) + 1.0;
    if (spread <= 0.0)
        return lstub__fail(err, LSTUB_E_GEOMETRY, "length", -1,
                           "length = %.9g m: too short for diameter = %.9g m, the form turns negative", length, diameter);
    *inductance = 5.08e-9 / 0.0254 * length * spread;
    return LSTUB_OK;
}
