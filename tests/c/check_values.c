/* Values from outside: tests/data/check_values.csv, the table that C, Python and Lua all read. */
#include "check_util.h"

#define ROWS_MAX 256
#define ARGS_MAX 8

typedef struct row {
    char   text[1024];                 /* the line, cut into the pieces that the pointers below point at */
    char  *id, *function, *arguments, *source;
    double expected, rel, abs;
} row;

static row    rows[ROWS_MAX];
static size_t row_count;

/* The table is read before any test runs, where Check's own assertions cannot be used. */
static void need(int fine, const char *what, const char *text)
{
    if (!fine) {
        fprintf(stderr, "check_values.csv: %s: '%s'\n", what, text);
        exit(EXIT_FAILURE);
    }
}

/* Cuts the line at its next comma. Only the source, which comes last, is quoted. */
static char *cut(char **at)
{
    char *field = *at, *comma = strchr(field, ',');
    need(comma != NULL, "a column is missing after", field);
    *comma = '\0';
    *at = comma + 1;
    return field;
}

static double number(const char *text)
{
    char  *end;
    double value = strtod(text, &end);
    need(end != text && *end == '\0', "not a number", text);
    return value;
}

static void read_row(row *r)
{
    char *at = r->text, *end = r->text + strlen(r->text);
    while (end > at && (end[-1] == '\n' || end[-1] == '"'))
        *--end = '\0';
    r->id = cut(&at);
    r->function = cut(&at);
    r->arguments = cut(&at);
    r->expected = number(cut(&at));
    r->rel = number(cut(&at));
    r->abs = number(cut(&at));
    r->source = at + (*at == '"');
}

static void read_table(void)
{
    char  header[256] = "";
    FILE *file = fopen(LSTUB_TEST_DATA "/check_values.csv", "r");
    need(file != NULL, "cannot be opened", LSTUB_TEST_DATA);
    need(fgets(header, sizeof header, file) != NULL
             && strcmp(header, "id,function,arguments,expected,rel_tol,abs_tol,source\n") == 0, "header", header);
    while (row_count < ROWS_MAX && fgets(rows[row_count].text, sizeof rows[0].text, file) != NULL)
        read_row(&rows[row_count++]);
    fclose(file);
}

/* The arguments of one row, each of which must be asked for once. */
typedef struct arguments {
    char   text[512];
    char  *name[ARGS_MAX];
    double value[ARGS_MAX];
    int    used[ARGS_MAX];
    size_t count;
} arguments;

static void read_arguments(arguments *a, const char *text)
{
    char *word;
    memset(a, 0, sizeof *a);
    ck_assert_uint_lt(strlen(text), sizeof a->text);
    strcpy(a->text, text);
    for (word = strtok(a->text, " "); word != NULL; word = strtok(NULL, " ")) {
        char *equals = strchr(word, '=');
        ck_assert_msg(equals != NULL && a->count < ARGS_MAX, "not name=value: '%s'", word);
        *equals = '\0';
        a->name[a->count] = word;
        a->value[a->count++] = number(equals + 1);
    }
}

static double take(arguments *a, const char *name)
{
    for (size_t i = 0; i < a->count; i++)
        if (strcmp(a->name[i], name) == 0) {
            a->used[i]++;
            return a->value[i];
        }
    ck_abort_msg("no argument '%s'", name);
    return NAN;
}
#define A(name) take(a, #name)

/* One caller per function of the table: writes the output `out` (C parameter name) to *v. */
typedef int32_t caller(arguments *a, const char *out, double *v, lstub_error *err);

#define CALLER(function, call)                                                                                        \
    static int32_t call_##function(arguments *a, const char *out, double *v, lstub_error *err)                         \
    {                                                                                                                 \
        ck_assert_str_eq(out, "");                                                                                    \
        return lstub_##function call;                                                                                 \
    }

CALLER(quarter_wave_frequency, (A(length), A(dk), (int32_t)A(n), v, err))
CALLER(quarter_wave_length, (A(f), A(dk), (int32_t)A(n), v, err))
CALLER(quarter_wave_dk, (A(f), A(length), (int32_t)A(n), v, err))
CALLER(delay_dk, (A(delay), v, err))
CALLER(loaded_stub_frequency, (A(length), A(dk), A(zs), A(end_capacitance), (int32_t)A(n), v, err))
CALLER(notch_floor, (A(zs), A(z0), A(loss_tangent), (int32_t)A(n), v, err))
CALLER(stub_skirt, (A(zs), A(z0), A(f_over_f1), v, err))
CALLER(rule_of_thumb_length, (A(bit_rate), v, err))
CALLER(return_inductance, (A(drill), (int32_t)A(count), A(distance), A(return_drill), v, err))
CALLER(plate_capacitance, (A(drill), A(antipad), A(spacing), A(dk_through_plane), A(dk_in_plane), v, err))
CALLER(handbook_capacitance, (A(thickness), A(pad), A(antipad), A(dk), v, err))
CALLER(handbook_inductance, (A(length), A(diameter), v, err))

/* Which of `names` is `out`; the others are asked for nothing. */
static size_t which(const char *out, const char *const *names, size_t count)
{
    for (size_t i = 0; i < count; i++)
        if (strcmp(out, names[i]) == 0)
            return i;
    ck_abort_msg("no output '%s'", out);
    return 0;
}

static int32_t call_coax(arguments *a, const char *out, double *v, lstub_error *err)
{
    static const char *const names[] = {"capacitance", "inductance", "impedance"};
    double *to[3] = {NULL, NULL, NULL};
    to[which(out, names, COUNT(names))] = v;
    return lstub_coax(A(inner_diameter), A(outer_diameter), A(dk), to[0], to[1], to[2], err);
}

static int32_t call_twin_rod(arguments *a, const char *out, double *v, lstub_error *err)
{
    static const char *const names[] = {"odd_inductance", "differential_impedance"};
    double *to[2] = {NULL, NULL};
    to[which(out, names, COUNT(names))] = v;
    return lstub_twin_rod(A(drill), A(pitch), A(dk), to[0], to[1], err);
}

static int32_t call_dielectric_permittivity(arguments *a, const char *out, double *v, lstub_error *err)
{
    static const char *const names[] = {"through_plane_re", "loss_tangent"};
    size_t wanted = which(out, names, COUNT(names));
    double f = A(freq), eps[2] = {NAN, NAN};
    lstub_dielectric d;
    int32_t status;
    LSTUB_INIT(d);
    d.dk = A(dk);
    d.loss_tangent = A(loss_tangent);
    d.f_ref = A(f_ref);
    status = lstub_dielectric_permittivity(&d, &f, 1, eps, NULL, err);
    *v = wanted == 0 ? eps[0] : -eps[1] / eps[0];
    return status;
}

static lstub_signal signal_of(arguments *a)
{
    lstub_signal s;
    LSTUB_INIT(s);
    s.symbol_rate = A(symbol_rate);
    s.levels = (int32_t)A(levels);
    return s;
}

static int32_t call_signal_nyquist(arguments *a, const char *out, double *v, lstub_error *err)
{
    lstub_signal s = signal_of(a);
    ck_assert_str_eq(out, "");
    return lstub_signal_nyquist(&s, v, err);
}

static int32_t call_signal_bit_rate(arguments *a, const char *out, double *v, lstub_error *err)
{
    lstub_signal s = signal_of(a);
    ck_assert_str_eq(out, "");
    return lstub_signal_bit_rate(&s, v, err);
}

static const struct {
    const char *name;
    caller     *call;
} callers[] = {
#define ENTRY(f) {#f, call_##f}
    ENTRY(quarter_wave_frequency), ENTRY(quarter_wave_length), ENTRY(quarter_wave_dk), ENTRY(delay_dk),
    ENTRY(loaded_stub_frequency), ENTRY(notch_floor), ENTRY(stub_skirt), ENTRY(rule_of_thumb_length), ENTRY(coax),
    ENTRY(return_inductance), ENTRY(twin_rod), ENTRY(plate_capacitance), ENTRY(handbook_capacitance),
    ENTRY(handbook_inductance), ENTRY(dielectric_permittivity), ENTRY(signal_nyquist), ENTRY(signal_bit_rate),
};

START_TEST(every_row)
{
    const row *r = &rows[_i];
    char function[64], *out;
    arguments a;
    lstub_error err;
    double got = NAN;
    size_t i;
    LSTUB_INIT(err);
    ck_assert_uint_lt(strlen(r->function), sizeof function);
    strcpy(function, r->function);
    out = strchr(function, ':');
    if (out != NULL)
        *out++ = '\0';
    read_arguments(&a, r->arguments);
    for (i = 0; i < COUNT(callers) && strcmp(callers[i].name, function) != 0; i++)
        ;
    ck_assert_msg(i < COUNT(callers), "%s: no such function: %s", r->id, function);
    assert_ok(callers[i].call(&a, out != NULL ? out : "", &got, &err), err);
    for (i = 0; i < a.count; i++)
        ck_assert_msg(a.used[i] == 1, "%s: argument '%s' is not one of %s", r->id, a.name[i], function);
    assert_close(got, r->expected, r->rel, r->abs, r->source);
}
END_TEST

START_TEST(table_is_whole)
{
    ck_assert_uint_ge(row_count, 25);
    ck_assert_uint_lt(row_count, ROWS_MAX);
    for (size_t i = 0; i < row_count; i++) {
        ck_assert_msg(rows[i].source[0] != '\0', "%s has no source", rows[i].id);
        for (size_t j = 0; j < i; j++)
            ck_assert_str_ne(rows[i].id, rows[j].id);
    }
    for (size_t i = 0; i < COUNT(callers); i++) {
        size_t n = strlen(callers[i].name), j = 0;
        while (j < row_count && (strncmp(rows[j].function, callers[i].name, n) != 0 ||
                                 (rows[j].function[n] != '\0' && rows[j].function[n] != ':')))
            j++;
        ck_assert_msg(j < row_count, "no row for %s", callers[i].name);
    }
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("values");
    TCase *all = tcase_create("table");
    read_table();
    tcase_add_test(all, table_is_whole);
    tcase_add_loop_test(all, every_row, 0, (int)row_count);
    suite_add_tcase(suite, all);
    return test_main(suite);
}
