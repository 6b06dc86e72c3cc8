/* Writes a Touchstone file. */
#include "touchstone/decimal.h"
#include "touchstone/layout.h"

#include <math.h>
#include <string.h>

#define PAIRS_IN_LINE 4        /* version 1 allows no more */
#define COMMENT_MOST 65000     /* bytes, so that every reader's line can hold it */

/* ---- what may be written ------------------------------------------------------------------------------ */

static int32_t choice(int32_t value, int32_t most, const char *field, lstub_error *err)
{
    if (value >= 0 && value <= most)
        return LSTUB_OK;
    return lstub__fail(err, LSTUB_E_ARGUMENT, field, -1, "%s = %ld: must be >= 0 and <= %ld", field, (long)value, (long)most);
}

static int32_t check_kinds(lstub_touchstone_data *d, lstub_error *err)
{
    int32_t status;
    if ((status = choice(d->version, 2, "version", err)) < 0 || (status = choice(d->parameter, LSTUB_NETWORK_H, "parameter", err)) < 0
        || (status = choice(d->format, LSTUB_FORMAT_DB, "format", err)) < 0 || (status = choice(d->unit, LSTUB_UNIT_GHZ, "unit", err)) < 0
        || (status = choice(d->matrix, LSTUB_MATRIX_UPPER, "matrix", err)) < 0
        || (status = choice(d->order, LSTUB_ORDER_12_21, "order", err)) < 0 || (status = choice(d->digits, 17, "digits", err)) < 0)
        return status;
    if (d->ports < 1 || d->ports > LSTUB_PORTS_MAX)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "ports", -1, "ports = %ld: must be >= 1 and <= %d", (long)d->ports, LSTUB_PORTS_MAX);
    d->version = d->version == 0 ? 1 : d->version;
    d->parameter = d->parameter == 0 ? LSTUB_NETWORK_S : d->parameter;
    int hybrid = d->parameter == LSTUB_NETWORK_G || d->parameter == LSTUB_NETWORK_H;
    if (d->parameter == LSTUB_NETWORK_ABCD)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "parameter", -1, "parameter = %ld: no Touchstone file holds ABCD parameters", (long)d->parameter);
    if (d->ports != 2 && (hybrid || d->order != 0))
        return lstub__fail(err, LSTUB_E_ARGUMENT, hybrid ? "parameter" : "order", -1, "%s for two ports only: ports = %ld",
                           hybrid ? "G and H parameters are" : "order is", (long)d->ports);
    if (hybrid && d->rows != NULL)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "rows", -1, "rows: mixed-mode data cannot be G or H parameters");
    if (d->version == 1 && (d->matrix != 0 || d->order != 0 || d->rows != NULL)) {
        const char *field = d->matrix != 0 ? "matrix" : d->order != 0 ? "order" : "rows";
        return lstub__fail(err, LSTUB_E_ARGUMENT, field, -1, "%s: only version 2 has this", field);
    }
    return LSTUB_OK;
}

static int32_t check_reference(const lstub_touchstone_data *d, double reference[LSTUB_PORTS_MAX], lstub_error *err)
{
    for (int32_t i = 0; i < LSTUB_PORTS_MAX; i++)
        reference[i] = d->reference != NULL && i < d->ports ? d->reference[i] : 50.0;
    for (int32_t i = 0; i < d->ports; i++) {
        if (!(reference[i] > 0.0 && isfinite(reference[i])))
            return lstub__fail(err, LSTUB_E_ARGUMENT, "reference", i, "reference of port %ld = %.9g ohm: must be > 0 and finite", (long)i, reference[i]);
        if (d->version == 1 && reference[i] != reference[0])
            return lstub__fail(err, LSTUB_E_ARGUMENT, "reference", i, "reference of port %ld = %.9g ohm: version 1 has one for all, %.9g ohm",
                               (long)i, reference[i], reference[0]);
    }
    const char *fault = d->rows != NULL ? lstub__rows_fault(d->rows, d->ports, reference) : NULL;
    return fault == NULL ? LSTUB_OK : lstub__fail(err, LSTUB_E_ARGUMENT, "rows", -1, "rows: %s", fault);
}

static int32_t check_comments(const lstub_touchstone_data *d, lstub_error *err)
{
    if (d->comment_count > 0 && lstub__need(d->comments, "comments", err) < 0)
        return LSTUB_E_NULL;
    for (size_t i = 0; i < d->comment_count; i++) {
        const char *text = d->comments[i];
        size_t n = 0;
        if (lstub__need(text, "comments", err) < 0)
            return LSTUB_E_NULL;
        while (n < COMMENT_MOST && ((unsigned char)text[n] >= ' ' || text[n] == '\t'))
            n++;
        if (text[n] != '\0')
            return lstub__fail(err, LSTUB_E_ARGUMENT, "comments", (int64_t)i, "comments[%lu]: must be one line of at most %d bytes", (unsigned long)i,
                               COMMENT_MOST - 1);
    }
    return LSTUB_OK;
}

static int32_t check_symmetric(const lstub_touchstone_data *d, size_t k, double largest, lstub_error *err)
{
    int p = d->ports;
    const double *m = d->data + 2 * k * (size_t)(p * p);
    for (int i = 0; i < p; i++)
        for (int j = 0; j < i; j++) {
            const double *a = m + 2 * (i * p + j), *b = m + 2 * (j * p + i);
            double off = hypot(a[0] - b[0], a[1] - b[1]);
            if (off > 1e-12 * largest)
                return lstub__fail(err, LSTUB_E_ARGUMENT, "matrix", (int64_t)k, "data[%lu]: [%d][%d] and [%d][%d] differ by %.3g: half a matrix "
                                   "needs symmetry to 1e-12 of its largest entry", (unsigned long)k, i, j, j, i, off);
        }
    return LSTUB_OK;
}

/* A number as the file has it. */
static void normalised(const lstub_touchstone_data *d, const lstub__entry *e, size_t k, double z[2])
{
    const double *m = d->data + 2 * (k * (size_t)(d->ports * d->ports) + (size_t)(e->row * d->ports + e->column));
    z[0] = m[0] / e->scale;
    z[1] = m[1] / e->scale;
}

static int32_t check_matrix(const lstub_touchstone_data *d, const lstub__layout *layout, size_t k, lstub_error *err)
{
    double largest = 0.0;
    int p = d->ports;
    for (int i = 0; i < p * p; i++) {
        const double *m = d->data + 2 * (k * (size_t)(p * p) + (size_t)i);
        if (!isfinite(m[0]) || !isfinite(m[1]))
            return lstub__fail(err, LSTUB_E_ARGUMENT, "data", (int64_t)k, "data[%lu][%d][%d] = %g %+gj: must be finite", (unsigned long)k, i / p,
                               i % p, m[0], m[1]);
        largest = fmax(largest, hypot(m[0], m[1]));
    }
    for (int i = 0; i < layout->count; i++) {
        const lstub__entry *e = &layout->entry[i];
        double z[2], a, b;
        normalised(d, e, k, z);
        lstub__pair_write(d->format, z, &a, &b);
        if (!isfinite(a) || !isfinite(b))
            return lstub__fail(err, LSTUB_E_ARGUMENT, "data", (int64_t)k, "data[%lu][%d][%d]: %s in this format; use another", (unsigned long)k,
                               e->row, e->column, a < 0.0 ? "0 has no decibels" : "is beyond the range of a double");
    }
    return d->matrix == LSTUB_MATRIX_FULL ? LSTUB_OK : check_symmetric(d, k, largest, err);
}

static int32_t check_points(const lstub_touchstone_data *d, const lstub__layout *layout, lstub_error *err)
{
    int32_t status = LSTUB_OK;
    if (lstub__need(d->freq, "freq", err) < 0 || lstub__need(d->data, "data", err) < 0)
        return LSTUB_E_NULL;
    if (d->points == 0)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "points", -1, "points = 0: must be >= 1");
    for (size_t k = 0; k < d->points && status == LSTUB_OK; k++) {
        double f = d->freq[k];
        if (!(f >= 0.0 && isfinite(f)))
            return lstub__fail(err, LSTUB_E_ARGUMENT, "freq", (int64_t)k, "freq[%lu] = %.9g Hz: must be >= 0 and finite", (unsigned long)k, f);
        if (k > 0 && f <= d->freq[k - 1])
            return lstub__fail(err, LSTUB_E_ARGUMENT, "freq", (int64_t)k, "freq[%lu] = %.9g Hz after %.9g Hz: must rise", (unsigned long)k, f,
                               d->freq[k - 1]);
        status = check_matrix(d, layout, k, err);
    }
    return status;
}

/* ---- text ------------------------------------------------------------------------------------------------ */

typedef struct text {
    const lstub_sink *sink;
    int32_t answer;            /* of the sink; not 0: it takes no more */
    size_t  used;
    char    block[8192];
} text;

static void flush(text *t)
{
    if (t->answer == 0 && t->used > 0)
        t->answer = t->sink->write(t->sink->user, t->block, t->used);
    t->used = 0;
}

static void put(text *t, const char *bytes, size_t count)
{
    while (count > 0) {
        size_t n = sizeof t->block - t->used < count ? sizeof t->block - t->used : count;
        memcpy(t->block + t->used, bytes, n);
        t->used += n;
        bytes += n;
        count -= n;
        if (t->used == sizeof t->block)
            flush(t);
    }
}

static void puts_(text *t, const char *words) { put(t, words, strlen(words)); }

static void put_number(text *t, double value, int digits, int shift)
{
    char number[LSTUB__DECIMAL_MAX];
    int n = lstub__decimal_write(number, value, digits, shift);
    put(t, number, (size_t)n);
}

static void put_whole(text *t, double value) { put_number(t, value, 17, 0); }

static void put_row(text *t, const lstub_touchstone_row *row)
{
    puts_(t, row->kind == LSTUB_ROW_SINGLE ? " S" : row->kind == LSTUB_ROW_COMMON ? " C" : " D");
    put_whole(t, row->port + 1);
    if (row->kind != LSTUB_ROW_SINGLE) {
        puts_(t, ",");
        put_whole(t, row->partner + 1);
    }
}

static void put_keywords(text *t, const lstub_touchstone_data *d, const double *reference)
{
    static const char *const MATRICES[] = {"Full", "Lower", "Upper"};
    puts_(t, "[Number of Ports] ");
    put_whole(t, d->ports);
    if (d->ports == 2)
        puts_(t, d->order == LSTUB_ORDER_12_21 ? "\n[Two-Port Data Order] 12_21" : "\n[Two-Port Data Order] 21_12");
    puts_(t, "\n[Number of Frequencies] ");
    put_whole(t, (double)d->points);
    puts_(t, "\n[Reference]");
    for (int32_t i = 0; i < d->ports; i++) {
        puts_(t, " ");
        put_number(t, reference[i], 0, 0);
    }
    puts_(t, "\n[Matrix Format] ");
    puts_(t, MATRICES[d->matrix]);
    if (d->rows != NULL)
        puts_(t, "\n[Mixed-Mode Order]");
    for (int32_t i = 0; i < d->ports && d->rows != NULL; i++)
        put_row(t, &d->rows[i]);
    puts_(t, "\n[Network Data]\n");
}

static void put_head(text *t, const lstub_touchstone_data *d, const double *reference)
{
    if (d->version == 2)
        puts_(t, "[Version] 2.0\n");
    for (size_t i = 0; i < d->comment_count; i++) {
        puts_(t, "!");
        puts_(t, d->comments[i]);
        puts_(t, "\n");
    }
    puts_(t, "# ");
    puts_(t, lstub__unit_words[d->unit]);
    puts_(t, " ");
    puts_(t, lstub__parameter_words[d->parameter]);
    puts_(t, " ");
    puts_(t, lstub__format_words[d->format]);
    puts_(t, " R ");
    put_number(t, reference[0], 0, 0);
    puts_(t, "\n");
    if (d->version == 2)
        put_keywords(t, d, reference);
}

/* Two ports in one line, else every row in lines of its own. */
static void put_point(text *t, const lstub_touchstone_data *d, const lstub__layout *layout, size_t k)
{
    int in_line = 0;
    put_number(t, d->freq[k], d->digits, -lstub__unit_power(d->unit));
    for (int i = 0; i < layout->count; i++) {
        const lstub__entry *e = &layout->entry[i];
        double z[2], a, b;
        normalised(d, e, k, z);
        lstub__pair_write(d->format, z, &a, &b);
        if (d->ports > 2 && i > 0 && (in_line == PAIRS_IN_LINE || e->row != layout->entry[i - 1].row)) {
            puts_(t, "\n");
            in_line = 0;
        }
        puts_(t, " ");
        put_number(t, a, d->digits, 0);
        puts_(t, " ");
        put_number(t, b, d->digits, 0);
        in_line++;
    }
    puts_(t, "\n");
}

int32_t lstub_touchstone_write(const lstub_touchstone_data *data, const lstub_sink *sink, lstub_error *err)
{
    lstub_touchstone_data d;
    lstub_sink to;
    lstub__layout layout;
    double reference[LSTUB_PORTS_MAX];
    text t;
    int32_t status;
    if ((status = lstub__take(&d, sizeof d, data, sizeof d, "data", err)) < 0 || (status = lstub__take(&to, sizeof to, sink, sizeof to, "sink", err)) < 0)
        return status;
    if (to.write == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "sink", -1, "sink: write must not be null");
    if ((status = check_kinds(&d, err)) < 0 || (status = check_reference(&d, reference, err)) < 0
        || (status = check_comments(&d, err)) < 0)
        return status;
    lstub__layout_make(&layout, &d, reference[0]);
    if ((status = check_points(&d, &layout, err)) < 0)
        return status;
    t.sink = &to;
    t.answer = 0;
    t.used = 0;
    put_head(&t, &d, reference);
    for (size_t k = 0; k < d.points && t.answer == 0; k++)
        put_point(&t, &d, &layout, k);
    if (d.version == 2)
        puts_(&t, "[End]\n");
    flush(&t);
    return t.answer == 0 ? LSTUB_OK : lstub__fail(err, LSTUB_E_WRITE, "sink", -1, "sink: write answered %ld", (long)t.answer);
}
