/* The head of a Touchstone file: option line and keywords. */
#include "touchstone/decimal.h"
#include "touchstone/touchstone.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

/* ---- words ------------------------------------------------------------------------------------------ */

static char lower(char c) { return c >= 'A' && c <= 'Z' ? (char)(c - 'A' + 'a') : c; }

static int same(const char *p, int n, const char *word)
{
    for (int i = 0; i < n; i++)
        if (word[i] == '\0' || lower(p[i]) != lower(word[i]))
            return 0;
    return word[n] == '\0';
}

/* Number of the word in a list that ends with null; -1: none. */
static int32_t find(const char *p, int n, const char *const *words)
{
    for (int32_t i = 0; words[i] != NULL; i++)
        if (same(p, n, words[i]))
            return i;
    return -1;
}

#define SHOWN(n) ((n) < 40 ? (n) : 40)      /* of a word in a message */

/* A number > 0 that is a word of its own. Its end; null and a message. */
static const char *positive(lstub__reader *r, const char *p, const char *what, double *value)
{
    int n = lstub__word(p);
    const char *end = lstub__decimal_read(p, 0, value);
    if (end != p + n || n == 0) {
        lstub__lines_fail(&r->in, p, r->err, "%s: '%.*s' is no number", what, SHOWN(n), p);
        return NULL;
    }
    if (!(*value > 0.0 && isfinite(*value))) {
        lstub__lines_fail(&r->in, p, r->err, "%s = %.*s ohm: must be > 0 and finite", what, SHOWN(n), p);
        return NULL;
    }
    return end;
}

/* ---- option line ------------------------------------------------------------------------------------ */

static int32_t take_option(lstub__reader *r, lstub__option *o, unsigned *seen, const char **at)
{
    static const char *const NAMES[] = {"unit of frequency", "parameter", "format", "reference"};
    const char *p = *at, *end = p + lstub__word(p);
    int n = (int)(end - p), which;
    int32_t i;
    if ((i = find(p, n, lstub__unit_words)) >= 0) {
        which = 0;
        o->unit = i;
    } else if (n == 1 && (i = find(p, n, lstub__parameter_words)) >= 0) {
        which = 1;
        o->parameter = i;
    } else if ((i = find(p, n, lstub__format_words)) >= 0) {
        which = 2;
        o->format = i;
    } else if (same(p, n, "R")) {
        which = 3;
        if ((end = positive(r, lstub__blanks(end), "reference R", &o->reference)) == NULL)
            return LSTUB_E_FORMAT;
    } else {
        return lstub__lines_fail(&r->in, p, r->err, "'%.*s' is nothing that an option line has: Hz kHz MHz GHz, S Y Z G H, RI MA DB, "
                                 "R and a number", SHOWN(n), p);
    }
    if ((*seen & 1u << which) != 0)
        return lstub__lines_fail(&r->in, p, r->err, "a second %s in one option line: '%.*s'", NAMES[which], SHOWN(n), p);
    *seen |= 1u << which;
    *at = end;
    return LSTUB_OK;
}

int32_t lstub__read_option_line(lstub__reader *r, const char *p)
{
    lstub__option o = {r->in.number, LSTUB_UNIT_GHZ, LSTUB_NETWORK_S, LSTUB_FORMAT_MA, 50.0};
    unsigned seen = 0;
    int32_t status;
    const char *first = p;
    for (p = lstub__blanks(p + 1); !lstub__at_end(p); p = lstub__blanks(p))
        if ((status = take_option(r, &o, &seen, &p)) < 0)
            return status;
    if (r->option.line == 0)
        r->option = o;
    else if (o.unit != r->option.unit || o.parameter != r->option.parameter || o.format != r->option.format
             || o.reference != r->option.reference)
        return lstub__lines_fail(&r->in, first, r->err, "a second option line, which says other than that of line %ld: a file has "
                                 "one unit, parameter, format and reference", (long)r->option.line);
    return LSTUB_OK;
}

/* ---- keywords ---------------------------------------------------------------------------------------- */

enum { VERSION, PORTS, ORDER, POINTS, NOISE_POINTS, REFERENCE, MATRIX, MIXED_MODE, BEGIN, END_OF, NETWORK, NOISE, END };

static const char *const KEYWORDS[] = {
    "Version", "Number of Ports", "Two-Port Data Order", "Number of Frequencies", "Number of Noise Frequencies", "Reference",
    "Matrix Format", "Mixed-Mode Order", "Begin Information", "End Information", "Network Data", "Noise Data", "End", NULL};

static int has(const lstub__reader *r, int keyword) { return (r->seen & 1u << keyword) != 0; }

/* One of the words of a list, and nothing after it. */
static int32_t choice(lstub__reader *r, const char *p, int keyword, const char *const *words, int32_t *value)
{
    int n = lstub__word(p);
    int32_t i = find(p, n, words);
    if (i < 0)
        return lstub__lines_fail(&r->in, p, r->err, "[%s] = '%.*s': must be %s%s%s%s%s", KEYWORDS[keyword], SHOWN(n), p, words[0],
                                 words[2] ? ", " : "", words[2] ? words[1] : "", " or ", words[2] ? words[2] : words[1]);
    *value = i;
    p = lstub__blanks(p + n);
    return lstub__at_end(p) ? LSTUB_OK : lstub__lines_fail(&r->in, p, r->err, "[%s]: more than one word", KEYWORDS[keyword]);
}

/* A whole number from 1 to most, and nothing after it. */
static int32_t whole(lstub__reader *r, const char *p, int keyword, int64_t most, int64_t *value)
{
    int n = lstub__word(p), i = 0;
    *value = 0;
    for (; i < n && p[i] >= '0' && p[i] <= '9' && *value <= most; i++)
        *value = 10 * *value + (p[i] - '0');
    if (i == 0 || i < n || *value < 1 || *value > most || !lstub__at_end(lstub__blanks(p + n)))
        return lstub__lines_fail(&r->in, p, r->err, "[%s] = '%.*s': must be a whole number >= 1 and <= %.0f", KEYWORDS[keyword],
                                 SHOWN(n), p, (double)most);
    return LSTUB_OK;
}

static int32_t take_ports(lstub__reader *r, const char *p)
{
    int64_t ports = 0;
    int32_t status = whole(r, p, PORTS, LSTUB_PORTS_MAX, &ports);
    if (status == LSTUB_OK && r->ports_asked > 0 && ports != r->ports_asked)
        return lstub__lines_fail(&r->in, p, r->err, "[Number of Ports] = %d: the caller, or the file's name, says %ld",
                                 (int)ports, (long)r->ports_asked);
    r->file->data.ports = (int32_t)ports;
    return status;
}

static int32_t take_version(lstub__reader *r, const char *p)
{
    static const char *const VERSIONS[] = {"2.0", "2.1", NULL};
    int32_t which;
    if (r->option.line != 0 || r->seen != 1u << VERSION)
        return lstub__lines_fail(&r->in, NULL, r->err, "[Version] must be the first line but for comments");
    r->file->data.version = 2;
    return choice(r, p, VERSION, VERSIONS, &which);
}

/* "D1,2", "C1,2", "S3": rows of mixed-mode data. Null: it is none. */
static const char *read_row(const char *p, lstub_touchstone_row *row)
{
    int32_t *ports[2];
    char kind = lower(*p++);
    row->kind = kind == 'd' ? LSTUB_ROW_DIFFERENTIAL : kind == 'c' ? LSTUB_ROW_COMMON : LSTUB_ROW_SINGLE;
    row->partner = -1;
    ports[0] = &row->port;
    ports[1] = &row->partner;
    if (kind != 'd' && kind != 'c' && kind != 's')
        return NULL;
    for (int i = 0; i < (kind == 's' ? 1 : 2); i++) {
        int n = 0;
        if (i == 1 && *p++ != ',')
            return NULL;
        if (*p < '1' || *p > '9')
            return NULL;
        for (; *p >= '0' && *p <= '9'; p++)
            n = n > LSTUB_PORTS_MAX ? n : 10 * n + (*p - '0');
        *ports[i] = n - 1;
    }
    return p;
}

int32_t lstub__read_list(lstub__reader *r, const char *p)
{
    int32_t ports = r->file->data.ports;
    for (p = lstub__blanks(p); r->references_due > 0 && !lstub__at_end(p); p = lstub__blanks(p), r->references_due--)
        if ((p = positive(r, p, "[Reference]", &r->file->reference[ports - r->references_due])) == NULL)
            return LSTUB_E_FORMAT;
    for (; r->rows_due > 0 && !lstub__at_end(p); r->rows_due--) {
        int n = lstub__word(p);
        const char *end = read_row(p, &r->file->rows[ports - r->rows_due]);
        if (end != p + n)
            return lstub__lines_fail(&r->in, p, r->err, "[Mixed-Mode Order]: '%.*s' is none of D1,2 C1,2 S1", SHOWN(n), p);
        p = lstub__blanks(end);
    }
    if (!lstub__at_end(p))
        return lstub__lines_fail(&r->in, p, r->err, "more in this list than the file's ports, %ld", (long)ports);
    return LSTUB_OK;
}

static int32_t missing(lstub__reader *r, int keyword, const char *why)
{
    return lstub__lines_fail(&r->in, NULL, r->err, "[%s] is missing%s", KEYWORDS[keyword], why);
}

int32_t lstub__head_done(lstub__reader *r)
{
    lstub_touchstone *file = r->file;
    int32_t ports = file->data.ports;
    if (r->option.line == 0)
        return lstub__lines_fail(&r->in, NULL, r->err, "no option line ('#') before [Network Data]");
    if (!has(r, PORTS) || !has(r, POINTS))
        return missing(r, has(r, PORTS) ? POINTS : PORTS, "");
    if (ports == 2 && !has(r, ORDER))
        return missing(r, ORDER, ": two ports need it");
    if (ports != 2 && (has(r, ORDER) || has(r, NOISE_POINTS)))
        return lstub__lines_fail(&r->in, NULL, r->err, "[%s] in a file of %ld ports: for two ports only",
                                 KEYWORDS[has(r, ORDER) ? ORDER : NOISE_POINTS], (long)ports);
    if (ports != 2 && (r->option.parameter == LSTUB_NETWORK_G || r->option.parameter == LSTUB_NETWORK_H))
        return lstub__lines_fail_at(r->option.line, r->err, "G and H parameters in a file of %ld ports: for two ports only", (long)ports);
    for (int i = 0; i < LSTUB_PORTS_MAX && !has(r, REFERENCE); i++)
        file->reference[i] = r->option.reference;
    if (has(r, MIXED_MODE)) {
        const char *fault = lstub__rows_fault(file->rows, ports, file->reference);
        if (fault != NULL)
            return lstub__lines_fail(&r->in, NULL, r->err, "[Mixed-Mode Order]: %s", fault);
        if (r->option.parameter == LSTUB_NETWORK_G || r->option.parameter == LSTUB_NETWORK_H)
            return lstub__lines_fail(&r->in, NULL, r->err, "[Mixed-Mode Order] with G or H parameters");
        file->data.rows = file->rows;
    }
    return LSTUB_OK;
}

/* [Noise Data] and [End]: what they end must be whole. */
static int32_t take_end(lstub__reader *r, int keyword)
{
    int32_t status = LSTUB_OK;
    if (!has(r, NETWORK))
        return missing(r, NETWORK, "");
    if (r->part == LSTUB__NETWORK && (status = lstub__points_done(r)) < 0)
        return status;
    if (keyword == NOISE && !has(r, NOISE_POINTS))
        return missing(r, NOISE_POINTS, ": [Noise Data] needs it");
    if (keyword == END && has(r, NOISE_POINTS) && (int64_t)r->file->data.noise_points != r->noise_said)
        return lstub__lines_fail(&r->in, NULL, r->err, "%.0f lines of noise data: [Number of Noise Frequencies] says %.0f",
                                 (double)r->file->data.noise_points, (double)r->noise_said);
    r->part = keyword == END ? LSTUB__END : LSTUB__NOISE;
    return LSTUB_OK;
}

static int32_t take_list(lstub__reader *r, const char *p, int keyword)
{
    if (!has(r, PORTS))
        return missing(r, PORTS, " before this list");
    *(keyword == REFERENCE ? &r->references_due : &r->rows_due) = r->file->data.ports;
    return lstub__read_list(r, p);
}

static int32_t take(lstub__reader *r, const char *p, int keyword)
{
    static const char *const ORDERS[] = {"21_12", "12_21", NULL}, *const MATRICES[] = {"Full", "Lower", "Upper", NULL};
    const int64_t most = INT64_C(1) << 53;
    int32_t status;
    switch (keyword) {
    case VERSION: return take_version(r, p);
    case PORTS: return take_ports(r, p);
    case ORDER: return choice(r, p, keyword, ORDERS, &r->file->data.order);
    case POINTS: return whole(r, p, keyword, most, &r->points_said);
    case NOISE_POINTS: return whole(r, p, keyword, most, &r->noise_said);
    case MATRIX: return choice(r, p, keyword, MATRICES, &r->file->data.matrix);
    case REFERENCE: case MIXED_MODE: return take_list(r, p, keyword);
    default: break;
    }
    if (!lstub__at_end(p))
        return lstub__lines_fail(&r->in, p, r->err, "[%s] stands alone in its line", KEYWORDS[keyword]);
    switch (keyword) {
    case BEGIN: r->part = LSTUB__INFORMATION; return LSTUB_OK;
    case NETWORK:
        if ((status = lstub__head_done(r)) < 0)
            return status;
        lstub__points_start(r);
        return LSTUB_OK;
    case END_OF: return lstub__lines_fail(&r->in, NULL, r->err, "[End Information] without [Begin Information]");
    default: return take_end(r, keyword);
    }
}

/* "[Number  of Ports]" with blanks as one: the keyword's number, *end behind the bracket. */
static int32_t read_name(lstub__reader *r, const char *p, int *keyword, const char **end)
{
    char name[32];
    size_t n = 0;
    const char *first = p;
    for (p = lstub__blanks(p + 1); *p != ']'; p++) {
        if (*p == '\n' || n + 1 == sizeof name)
            return lstub__lines_fail(&r->in, first, r->err, "%s", *p == '\n' ? "'[' without ']'" : "no keyword of this standard is so long");
        if (*p != ' ' && *p != '\t')
            name[n++] = *p;
        else if (n > 0 && name[n - 1] != ' ')
            name[n++] = ' ';
    }
    while (n > 0 && name[n - 1] == ' ')
        n--;
    *end = lstub__blanks(p + 1);
    *keyword = (int)find(name, (int)n, KEYWORDS);
    if (*keyword < 0 && r->part != LSTUB__INFORMATION)
        return lstub__lines_fail(&r->in, first, r->err, "[%.*s] is no keyword of this standard", (int)n, name);
    return LSTUB_OK;
}

int32_t lstub__read_keyword(lstub__reader *r, const char *p)
{
    int keyword = -1, inside = r->part == LSTUB__INFORMATION;
    const char *first = p;
    int32_t status;
    if (r->file->data.version == 1 && r->part != LSTUB__HEAD)
        return lstub__lines_fail(&r->in, p, r->err, "a keyword among the data of version 1");
    if ((status = read_name(r, p, &keyword, &p)) < 0)
        return inside ? LSTUB_OK : status;
    if (inside) {
        if (keyword == END_OF)
            r->part = LSTUB__HEAD;
        return LSTUB_OK;
    }
    if (r->references_due > 0 || r->rows_due > 0)
        return lstub__lines_fail(&r->in, first, r->err, "[%s]: the list ends %d short of the file's ports",
                                 KEYWORDS[r->rows_due > 0 ? MIXED_MODE : REFERENCE], r->references_due + r->rows_due);
    if (has(r, keyword))
        return lstub__lines_fail(&r->in, first, r->err, "[%s] a second time", KEYWORDS[keyword]);
    if (keyword != VERSION && r->file->data.version == 1)
        return lstub__lines_fail(&r->in, first, r->err, "[%s] in a file that does not begin with [Version] 2.0", KEYWORDS[keyword]);
    if (r->part != LSTUB__HEAD && keyword != NOISE && keyword != END)
        return lstub__lines_fail(&r->in, first, r->err, "[%s] after [Network Data]", KEYWORDS[keyword]);
    r->seen |= 1u << keyword;
    return take(r, p, keyword);
}
