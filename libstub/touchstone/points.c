/* The data of a Touchstone file: lines of numbers become points. */
#include "touchstone/decimal.h"
#include "touchstone/touchstone.h"

#include <math.h>
#include <string.h>

#define NOISE_LINE 5       /* frequency, least noise figure, two of the source reflection, resistance */

/* ---- numbers of a line ------------------------------------------------------------------------------- */

/* Where number `index` of the line begins. */
static const char *place(const char *p, int index)
{
    for (p = lstub__blanks(p); index > 0; index--)
        p = lstub__blanks(p + lstub__word(p));
    return p;
}

static int32_t no_number(lstub__reader *r, const char *p)
{
    int n = lstub__word(p);
    return lstub__lines_fail(&r->in, p, r->err, *p == '#' ? "'#' among the data" : "'%.*s' is no number", n < 40 ? n : 40, p);
}

/* All numbers of a line into r->line. */
static int32_t split(lstub__reader *r, const char *p, int *count)
{
    int n = 0;
    for (p = lstub__blanks(p); !lstub__at_end(p); n++) {
        double value;
        const char *end = lstub__decimal_read(p, 0, &value);
        if (end == NULL || !(*end == ' ' || *end == '\t' || lstub__at_end(end)))
            return no_number(r, p);
        if (n == LSTUB__RECORD_MOST)
            return lstub__lines_fail(&r->in, p, r->err, "more than %d numbers in a line: more than %d ports", n, LSTUB_PORTS_MAX);
        if (!isfinite(value))
            return lstub__lines_fail(&r->in, p, r->err, "'%.*s' is beyond the range of a double", (int)(end - p) < 40 ? (int)(end - p) : 40, p);
        r->line[n] = value;
        p = lstub__blanks(end);
    }
    *count = n;
    return LSTUB_OK;
}

/* The frequency that begins a line, in Hz, rounded once. */
static double frequency(const lstub__reader *r, const char *p)
{
    double f = 0.0;
    lstub__decimal_read(lstub__blanks(p), lstub__unit_power(r->option.unit), &f);
    return f + 0.0;     /* no negative zero */
}

/* ---- points ------------------------------------------------------------------------------------------ */

void lstub__points_start(lstub__reader *r)
{
    lstub_touchstone_data *d = &r->file->data;
    d->parameter = r->option.parameter;
    d->format = r->option.format;
    d->unit = r->option.unit;
    lstub__layout_make(&r->layout, d, r->option.reference);
    r->length = 1 + 2 * r->layout.count;
    r->part = LSTUB__NETWORK;
}

static int32_t store(lstub__reader *r, double *out)
{
    int p = r->layout.ports;
    for (int k = 0; k < r->layout.count; k++) {
        const lstub__entry *e = &r->layout.entry[k];
        double *z = out + 2 * (e->row * p + e->column);
        lstub__pair_read(r->option.format, r->record[1 + 2 * k], r->record[2 + 2 * k], z);
        z[0] *= e->scale;
        z[1] *= e->scale;
        if (!isfinite(z[0]) || !isfinite(z[1]))
            return lstub__lines_fail_at(r->record_line, r->err, "point %.0f, row %d, column %d: beyond the range of a double",
                                        (double)r->file->data.points, e->row + 1, e->column + 1);
        if (r->file->data.matrix != LSTUB_MATRIX_FULL)
            memcpy(out + 2 * (e->column * p + e->row), z, 2 * sizeof *z);
    }
    return LSTUB_OK;
}

static int32_t widen(const lstub_allocator *alloc, double **array, size_t used, size_t room, size_t each, lstub_error *err)
{
    double *moved = lstub__new(alloc, room, each * sizeof **array, err);
    if (moved == NULL)
        return LSTUB_E_MEMORY;
    if (used > 0)
        memcpy(moved, *array, used * each * sizeof **array);
    lstub__free(alloc, *array);
    *array = moved;
    return LSTUB_OK;
}

/* Room for a point more: for as many as the length of the source lets expect, where it is known, but never for more than 16
** times what has come, as files may be sparse; else for twice as many. */
static int32_t make_room(lstub__reader *r, size_t numbers)
{
    lstub_touchstone *file = r->file;
    size_t n = file->data.points, room = n > 0 ? 2 * n : 16;
    if (n < r->room)
        return LSTUB_OK;
    if (n > 0 && r->bytes_said > 0.0) {
        double now = lstub__lines_taken(&r->in) - r->bytes_before, all = r->bytes_said - r->bytes_before;
        double expected = (double)n * fmin(1.02 * all / now, 16.0);
        if (expected > 1.01 * (double)n)
            room = (size_t)expected + 1;
    }
    int32_t status;
    if ((status = widen(&file->alloc, &file->freq, n, room, 1, r->err)) < 0
        || (status = widen(&file->alloc, &file->values, n, room, numbers, r->err)) < 0)
        return status;
    r->room = room;
    return LSTUB_OK;
}

/* r->record is whole. */
static int32_t keep(lstub__reader *r)
{
    lstub_touchstone *file = r->file;
    lstub_touchstone_data *d = &file->data;
    size_t n = d->points, numbers = 2 * (size_t)r->layout.ports * (size_t)r->layout.ports;
    double f = r->record[0];
    int32_t status;
    if (f < 0.0)
        return lstub__lines_fail_at(r->record_line, r->err, "frequency = %.9g Hz: must be >= 0", f);
    if (n > 0 && f <= file->freq[n - 1])
        return lstub__lines_fail_at(r->record_line, r->err, "frequency = %.9g Hz after %.9g Hz: must rise", f, file->freq[n - 1]);
    if (d->version == 2 && (int64_t)n == r->points_said)
        return lstub__lines_fail_at(r->record_line, r->err, "more points than [Number of Frequencies] = %.0f", (double)r->points_said);
    if ((status = make_room(r, numbers)) < 0)
        return status;
    file->freq[n] = f;
    r->fill = 0;
    status = store(r, file->values + n * numbers);
    d->points = n + (status == LSTUB_OK);
    return status;
}

static int32_t append(lstub__reader *r, const char *p, int count)
{
    if (r->fill == 0) {
        r->record_line = r->in.number;
        if (r->room == 0)
            r->bytes_before = lstub__lines_taken(&r->in);
        r->line[0] = frequency(r, p);
        if (!isfinite(r->line[0]))
            return lstub__lines_fail(&r->in, lstub__blanks(p), r->err, "a frequency beyond the range of a double");
    }
    if (r->fill + count > r->length && r->length > 0)
        return lstub__lines_fail(&r->in, place(p, r->length - r->fill), r->err, "more than the %d numbers that a point of %d port%s has; "
                                 "it begins in line %ld", r->length, r->layout.ports, r->layout.ports > 1 ? "s" : "", (long)r->record_line);
    memcpy(r->record + r->fill, r->line, (size_t)count * sizeof r->line[0]);
    r->fill += count;
    return r->fill == r->length ? keep(r) : LSTUB_OK;
}

/* ---- version 1: the number of ports from the lines --------------------------------------------------- */

/* r->record holds the first point, which ended because the next line begins another, or because there is none. */
static int32_t count_ports(lstub__reader *r)
{
    int ports = 1;
    while (ports <= LSTUB_PORTS_MAX && 1 + 2 * ports * ports != r->fill)
        ports++;
    if (ports > LSTUB_PORTS_MAX)
        return lstub__lines_fail_at(r->record_line, r->err, "how many ports the file has is ambiguous: the first point has %d number%s up to "
                                    "the next line with an odd count, which is 1 + 2 p p for no p from 1 to %d; say how many, or name the "
                                    "file .sNp", r->fill, r->fill == 1 ? "" : "s", LSTUB_PORTS_MAX);
    r->file->data.ports = ports;
    if (ports != 2 && (r->option.parameter == LSTUB_NETWORK_G || r->option.parameter == LSTUB_NETWORK_H))
        return lstub__lines_fail_at(r->option.line, r->err, "G and H parameters in a file of %d port%s: for two ports only", ports,
                                    ports > 1 ? "s" : "");
    lstub__points_start(r);
    return keep(r);
}

/* A line before the number is known: an odd count begins a point. */
static int32_t gather(lstub__reader *r, const char *p, int count)
{
    int32_t status;
    if (r->fill > 0 && count % 2 == 1) {
        if ((status = count_ports(r)) < 0)
            return status;
        return lstub__read_numbers(r, p);
    }
    if (r->fill == 0 && count % 2 == 0)
        return lstub__lines_fail(&r->in, NULL, r->err, "how many ports the file has is ambiguous: the first line of data has %d numbers, "
                                 "which is no frequency and whole pairs; say how many, or name the file .sNp", count);
    if (r->fill + count > LSTUB__RECORD_MOST)
        return lstub__lines_fail(&r->in, NULL, r->err, "more than %d numbers in a point: more than %d ports", LSTUB__RECORD_MOST,
                                 LSTUB_PORTS_MAX);
    return append(r, p, count);
}

/* ---- lines ------------------------------------------------------------------------------------------- */

static int32_t read_noise(lstub__reader *r, int count)
{
    lstub_touchstone_data *d = &r->file->data;
    if (count != NOISE_LINE)
        return lstub__lines_fail(&r->in, NULL, r->err, "%d number%s in a line of noise data: must be %d", count, count == 1 ? "" : "s", NOISE_LINE);
    if (d->version == 2 && (int64_t)d->noise_points == r->noise_said)
        return lstub__lines_fail(&r->in, NULL, r->err, "more noise data than [Number of Noise Frequencies] = %.0f", (double)r->noise_said);
    d->noise_points++;
    return LSTUB_OK;
}

int32_t lstub__read_numbers(lstub__reader *r, const char *p)
{
    const lstub_touchstone *file = r->file;
    int count = 0;
    int32_t status = split(r, p, &count);
    if (status < 0)
        return status;
    if (r->part == LSTUB__NOISE)
        return read_noise(r, count);
    if (r->length == 0)
        return gather(r, p, count);
    /* Noise data of version 1 have no keyword: the frequency falls back. */
    if (r->fill == 0 && count == NOISE_LINE && file->data.version == 1 && r->layout.ports == 2 && file->data.points > 0
        && frequency(r, p) <= file->freq[file->data.points - 1]) {
        r->part = LSTUB__NOISE;
        return read_noise(r, count);
    }
    return append(r, p, count);
}

int32_t lstub__points_done(lstub__reader *r)
{
    const lstub_touchstone_data *d = &r->file->data;
    int32_t status;
    if (r->length == 0 && r->fill > 0 && (status = count_ports(r)) < 0)
        return status;
    if (r->fill > 0)
        return lstub__lines_fail_at(r->record_line, r->err, "point %.0f has %d numbers of %d when the data end", (double)d->points, r->fill,
                                    r->length);
    if (d->version == 2 && (int64_t)d->points != r->points_said)
        return lstub__lines_fail(&r->in, NULL, r->err, "%.0f points: [Number of Frequencies] says %.0f", (double)d->points,
                                 (double)r->points_said);
    if (d->points == 0)
        return lstub__lines_fail(&r->in, NULL, r->err, "no data");
    return LSTUB_OK;
}
