#include "touchstone/layout.h"

#include <math.h>

const char *const lstub__unit_words[5] = {"Hz", "kHz", "MHz", "GHz", NULL};
const char *const lstub__format_words[4] = {"RI", "MA", "DB", NULL};
const char *const lstub__parameter_words[8] = {"", "S", "Z", "Y", "", "G", "H", NULL};   /* LSTUB_NETWORK_ABCD is none */

int lstub__unit_power(int32_t unit) { return 3 * (int)unit; }

/* ---- where numbers stand --------------------------------------------------------------------------- */

/* Ohm are divided by the reference, siemens multiplied by it. */
static double scale_of(int32_t parameter, int row, int column, double reference)
{
    int ohm = row == 0 ? LSTUB_NETWORK_H : LSTUB_NETWORK_G;     /* of the two hybrids, the one whose diagonal is in ohm here */
    if (parameter == LSTUB_NETWORK_Z)
        return reference;
    if (parameter == LSTUB_NETWORK_Y)
        return 1.0 / reference;
    if (parameter == LSTUB_NETWORK_S || row != column)
        return 1.0;
    return parameter == ohm ? reference : 1.0 / reference;
}

void lstub__layout_make(lstub__layout *out, const lstub_touchstone_data *data, double reference)
{
    int ports = data->ports, full = data->matrix == LSTUB_MATRIX_FULL, k = 0;
    int turned = ports == 2 && full && data->order == LSTUB_ORDER_21_12;
    out->ports = ports;
    for (int i = 0; i < ports; i++)
        for (int j = data->matrix == LSTUB_MATRIX_UPPER ? i : 0; j <= (data->matrix == LSTUB_MATRIX_LOWER ? i : ports - 1); j++) {
            lstub__entry *e = &out->entry[k++];
            e->row = turned ? j : i;
            e->column = turned ? i : j;
            e->scale = data->version == 1 ? scale_of(data->parameter, e->row, e->column, reference) : 1.0;
        }
    out->count = k;
}

const char *lstub__rows_fault(const lstub_touchstone_row *rows, int32_t ports, const double *reference)
{
    int seen[3][LSTUB_PORTS_MAX] = {{0}}, partner[LSTUB_PORTS_MAX];
    for (int32_t i = 0; i < ports; i++) {
        const lstub_touchstone_row *r = &rows[i];
        int pair = r->kind != LSTUB_ROW_SINGLE;
        if (r->kind < LSTUB_ROW_SINGLE || r->kind > LSTUB_ROW_COMMON)
            return "there is no such kind of row";
        if (r->port < 0 || r->port >= ports || (pair && (r->partner < 0 || r->partner >= ports || r->partner == r->port)))
            return "a row's port that the file does not have, or twice the same";
        if (seen[r->kind][r->port]++ != 0 || (pair && seen[r->kind][r->partner]++ != 0))
            return "a port is in two rows of one kind";
        if (pair && reference[r->port] != reference[r->partner])
            return "the two ports of a pair have different references";
        if (r->kind == LSTUB_ROW_DIFFERENTIAL) {
            partner[r->port] = r->partner;
            partner[r->partner] = r->port;
        }
    }
    for (int32_t i = 0; i < ports; i++) {
        const lstub_touchstone_row *r = &rows[i];
        if (seen[LSTUB_ROW_SINGLE][i] + seen[LSTUB_ROW_DIFFERENTIAL][i] != 1
            || seen[LSTUB_ROW_COMMON][i] != seen[LSTUB_ROW_DIFFERENTIAL][i])
            return "each port must be in one single-ended row, or in one differential and one common row";
        if (r->kind == LSTUB_ROW_COMMON && (!seen[LSTUB_ROW_DIFFERENTIAL][r->port] || partner[r->port] != r->partner))
            return "each port must have the same partner in its differential and its common row";
    }
    return NULL;
}

/* ---- pairs ------------------------------------------------------------------------------------------ */

#define DEGREE (LSTUB_PI / 180.0)
#define LN10   2.30258509299404568402

/* The angle is reduced in degrees, where that is exact: 90 and 180 degrees have no rounding left. Quarters come at random, so
** there is no branch for them. */
static void polar(double magnitude, double angle, double z[2])
{
    static const double RE[] = {1.0, -1.0, -1.0, 1.0}, IM[] = {1.0, 1.0, -1.0, -1.0};
    double turn = fabs(angle) <= 360.0 ? angle : fmod(angle, 360.0), part[2];
    int quarter = (int)(turn * (1.0 / 90.0) + copysign(0.5, turn));
    double rest = (turn - 90.0 * quarter) * DEGREE;
    part[0] = magnitude * cos(rest);
    part[1] = magnitude * sin(rest);
    quarter &= 3;
    z[0] = RE[quarter] * part[quarter & 1];
    z[1] = IM[quarter] * part[1 - (quarter & 1)];
}

/* 10^(db/20). Whole twenties are taken out, exactly, so that the rounding of the rest stays small. */
static double from_decibels(double db)
{
    static const double TENS[] = {1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,  1e8,  1e9,  1e10, 1e11,
                                  1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};
    if (!(fabs(db) < 400.0))
        return pow(10.0, db / 20.0);
    int n = (int)(db * 0.05 + copysign(0.5, db));
    double rest = exp((db - 20.0 * n) * (LN10 / 20.0));
    return n < 0 ? rest / TENS[-n] : rest * TENS[n];
}

/* One step of Newton's brings it within half a unit in the last place of what reads back. */
static double to_decibels(double magnitude)
{
    double db = 20.0 * log10(magnitude), back = from_decibels(db);
    if (!isfinite(db) || !isfinite(back) || back == 0.0)
        return db;
    return db + (magnitude / back - 1.0) * (20.0 / LN10);
}

/* The angle to the nearest half axis, which is small and so is its rounding, and whole quarters. */
static double degrees(const double z[2])
{
    double re = z[0], im = z[1];
    if (fabs(im) <= re)
        return atan2(im, re) / DEGREE;
    if (fabs(im) <= -re)
        return (im < 0.0 || (im == 0.0 && signbit(im)) ? -180.0 : 180.0) + atan2(-im, -re) / DEGREE;
    return im > 0.0 ? 90.0 + atan2(-re, im) / DEGREE : -90.0 + atan2(re, -im) / DEGREE;
}

void lstub__pair_read(int32_t format, double a, double b, double z[2])
{
    if (format == LSTUB_FORMAT_RI) {
        z[0] = a;
        z[1] = b;
    } else {
        polar(format == LSTUB_FORMAT_DB ? from_decibels(a) : a, b, z);
    }
}

void lstub__pair_write(int32_t format, const double z[2], double *a, double *b)
{
    if (format == LSTUB_FORMAT_RI) {
        *a = z[0];
        *b = z[1];
    } else {
        double magnitude = hypot(z[0], z[1]);
        *a = format == LSTUB_FORMAT_DB ? to_decibels(magnitude) : magnitude;
        *b = degrees(z);
    }
}
