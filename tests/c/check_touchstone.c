/* Touchstone files, read: what is in them, and what is refused. */
#include "check_util.h"

#define DATA(name) LSTUB_TEST_DATA "/touchstone/" name

static lstub_error err;
static lstub_touchstone *file;
static lstub_touchstone_data got;

static void setup(void)
{
    LSTUB_INIT(err);
    LSTUB_INIT(got);
    file = NULL;
}

static void teardown(void)
{
    lstub_touchstone_destroy(file);
    file = NULL;
}

static void parse(const char *text, int32_t ports)
{
    teardown();
    assert_ok(lstub_touchstone_parse(text, strlen(text), ports, NULL, &file, &err), err);
    assert_ok(lstub_touchstone_get(file, &got, &err), err);
}

static void load(const char *path)
{
    teardown();
    assert_ok(lstub_touchstone_load(path, 0, NULL, &file, &err), err);
    assert_ok(lstub_touchstone_get(file, &got, &err), err);
}

static const double *entry(size_t k, int i, int j) { return got.data + 2 * (k * (size_t)(got.ports * got.ports) + (size_t)(i * got.ports + j)); }

static void is(size_t k, int i, int j, double re, double im)
{
    const double *z = entry(k, i, j);
    assert_close(z[0], re, 1e-15, 1e-16, "by hand, from the file");
    assert_close(z[1], im, 1e-15, 1e-16, "by hand, from the file");
}

/* ---- files ------------------------------------------------------------------------------------------- */

START_TEST(version_1_two_ports)
{
    double h = sqrt(0.75);
    load(DATA("amplifier.s2p"));
    ck_assert(got.version == 1 && got.ports == 2 && got.parameter == LSTUB_NETWORK_S && got.format == LSTUB_FORMAT_MA);
    ck_assert(got.unit == LSTUB_UNIT_MHZ && got.points == 3 && got.noise_points == 2 && got.digits == 0);
    ck_assert(got.freq[0] == 1e9 && got.freq[1] == 2e9 && got.freq[2] == 3e9);
    ck_assert(got.reference[0] == 75.0 && got.reference[1] == 75.0 && got.rows == NULL);
    ck_assert(entry(0, 0, 0)[0] == 0.0 && entry(0, 0, 0)[1] == -0.5);      /* quarter turns are exact */
    ck_assert(entry(0, 1, 0)[0] == -4.0 && entry(0, 1, 0)[1] == 0.0);      /* 21 is the second pair */
    is(0, 0, 1, 0.0, 0.05);
    is(0, 1, 1, 0.25, 0.0);
    is(1, 0, 0, -0.2, -0.4 * h);
    is(1, 1, 0, -3.0 * h, 1.5);
    is(1, 0, 1, 0.03, 0.06 * h);
    is(1, 1, 1, 0.25 * sqrt(0.5), -0.25 * sqrt(0.5));
    ck_assert_uint_eq(got.comment_count, 5);
    ck_assert_str_eq(got.comments[1], " Port[1] = in");
    ck_assert_str_eq(got.comments[3], " in any order and case");
}
END_TEST

START_TEST(version_1_three_ports)
{
    load(DATA("splitter.s3p"));
    ck_assert(got.ports == 3 && got.points == 2 && got.freq[0] == 1.5e9 && got.freq[1] == 2.5e9 && got.comment_count == 0);
    for (size_t k = 0; k < 2; k++)
        for (int i = 0; i < 9; i++)
            is(k, i / 3, i % 3, (double)(10 * k + (size_t)i + 1) / 10.0, (i + 1) / 100.0);
    ck_assert(got.reference[0] == 50.0 && got.reference[2] == 50.0);
}
END_TEST

START_TEST(version_2_mixed_mode)
{
    static const lstub_touchstone_row rows[] = {{LSTUB_ROW_DIFFERENTIAL, 0, 2}, {LSTUB_ROW_COMMON, 0, 2}, {LSTUB_ROW_SINGLE, 3, -1}, {LSTUB_ROW_SINGLE, 1, -1}};
    load(DATA("pair.ts"));
    ck_assert(got.version == 2 && got.ports == 4 && got.points == 2 && got.matrix == LSTUB_MATRIX_LOWER && got.unit == LSTUB_UNIT_GHZ);
    ck_assert(got.reference[0] == 45 && got.reference[1] == 50 && got.reference[2] == 45 && got.reference[3] == 55);
    ck_assert_int_eq(memcmp(got.rows, rows, sizeof rows), 0);
    for (int i = 0; i < 4; i++)
        for (int j = 0; j < 4; j++) {
            int high = i > j ? i : j, low = i > j ? j : i;
            double v = (high + 1) / 10.0 + (low + 1) / 100.0;
            is(0, i, j, v, -v);
            is(1, i, j, 1 + v, 0);
        }
    ck_assert_uint_eq(got.comment_count, 3);
    ck_assert_str_eq(got.comments[2], " anything may stand here");
}
END_TEST

START_TEST(version_2_two_ports)
{
    load(DATA("stage.ts"));
    ck_assert(got.version == 2 && got.order == LSTUB_ORDER_12_21 && got.format == LSTUB_FORMAT_DB && got.noise_points == 2);
    ck_assert(got.freq[0] == 5000.0 && got.reference[1] == 25.0);
    is(0, 0, 0, 0.1, 0);
    is(0, 0, 1, 0, 0.01);
    is(0, 1, 0, -2, 0);
    is(0, 1, 1, 0, -1);
}
END_TEST

/* ---- the many ways to say it --------------------------------------------------------------------------- */

/* Option line, pair of a one-port in it, and what they are. */
START_TEST(option_lines)
{
    static const struct {
        const char *line, *pair;
        int32_t unit, parameter, format;
        double  reference, re, im, scale;
    } cases[] = {
        {"#", "2 90", LSTUB_UNIT_GHZ, LSTUB_NETWORK_S, LSTUB_FORMAT_MA, 50, 0, 2, 1e9},
        {"# hz ri", "2 -3", LSTUB_UNIT_HZ, LSTUB_NETWORK_S, LSTUB_FORMAT_RI, 50, 2, -3, 1},
        {"#\tR 10 KHZ\tDb", "20 -90", LSTUB_UNIT_KHZ, LSTUB_NETWORK_S, LSTUB_FORMAT_DB, 10, 0, -10, 1e3},
        {"  # RI z r 40 mHz", "2 -3", LSTUB_UNIT_MHZ, LSTUB_NETWORK_Z, LSTUB_FORMAT_RI, 40, 80, -120, 1e6},
        {"# Y MA r 4e1", "2 180", LSTUB_UNIT_GHZ, LSTUB_NETWORK_Y, LSTUB_FORMAT_MA, 40, -0.05, 0, 1e9},
        {"# S MA R 1 ! R 2", "2 -450", LSTUB_UNIT_GHZ, LSTUB_NETWORK_S, LSTUB_FORMAT_MA, 1, 0, -2, 1e9},
    };
    for (size_t i = 0; i < COUNT(cases); i++) {
        char text[200];
        snprintf(text, sizeof text, "%s\n0.57 %s\n", cases[i].line, cases[i].pair);
        parse(text, 1);
        ck_assert_msg(got.unit == cases[i].unit && got.parameter == cases[i].parameter && got.format == cases[i].format, "%s", text);
        ck_assert(got.reference[0] == cases[i].reference);
        is(0, 0, 0, cases[i].re, cases[i].im);
        assert_close(got.freq[0], 0.57 * cases[i].scale, 1e-15, 0, "the unit");
    }
}
END_TEST

/* The hybrids of version 1: ohm over the reference, siemens times it. Version 2 has them as they are. */
START_TEST(hybrids)
{
    parse("# Hz H RI R 50\n1 2 0 3 0 4 0 5 0\n", 2);
    is(0, 0, 0, 100, 0);
    is(0, 1, 0, 3, 0);
    is(0, 0, 1, 4, 0);
    is(0, 1, 1, 0.1, 0);
    parse("# Hz G RI R 50\n1 2 0 3 0 4 0 5 0\n", 0);
    is(0, 0, 0, 0.04, 0);
    is(0, 1, 1, 250, 0);
    parse("[Version] 2.0\n# Hz G RI R 50\n[Number of Ports] 2\n[Two-Port Data Order] 21_12\n[Number of Frequencies] 1\n"
          "[Network Data]\n1 2 0 3 0 4 0 5 0\n[End]\n", 0);
    is(0, 0, 0, 2, 0);
    is(0, 1, 0, 3, 0);
}
END_TEST

/* The same file however it is laid out. */
START_TEST(layouts)
{
    static const char *const same[] = {
        "# Hz S RI\n1 1 2 3 4 5 6 7 8\n2 9 10 11 12 13 14 15 16\n",
        "# Hz S RI\r\n1 1 2 3 4 5 6 7 8\r\n2 9 10 11 12 13 14 15 16\r\n",
        "# Hz S RI\r1 1 2 3 4 5 6 7 8\r2 9 10 11 12 13 14 15 16",
        "\xEF\xBB\xBF# Hz S RI\n1 1 2 3 4 5 6 7 8\n2 9 10 11 12 13 14 15 16",
        "!c\n\n \t\n#\tHz\tS\tRI\n\t1\t1\t2 3 4 5 6 7 8!c\n! c\n2 9 10 11 12 13 14 15 16 ! 5 6\n\n!\n",
        "# Hz S RI\n1 1 2\n3 4\n5 6 7 8\n2\n9 10 11 12 13 14\n15 16\n",
        "# Hz S RI\n1 1 2\n3 4 5\n6\n7 8\n2 9\n10 11 12 13 14 15 16\n",       /* pairs torn: not by the lines alone */
        "# Hz S RI\n1 1 2 3 4 5 6 7 8\n# S RI hz R 50.0\n2 9 10 11 12 13 14 15 16\n",
        "[Version] 2.0\n# Hz S RI\n[Number of ports] 2\n[two-port data order] 21_12\n[NUMBER  OF Frequencies] 2\n[ Network Data ]\n"
        "1 1 2 3 4\n5 6 7 8\n2 9 10 11 12 13 14 15 16\n[End]\n",
        "[Version] 2.0\n[Number of Ports] 2\n[Two-Port Data Order] 12_21\n[Number of Frequencies] 2\n[Matrix Format] Full\n# Hz S RI\n"
        "[Reference]\n50\n\n50\n[Network Data]\n1 1 2 5 6 3 4 7 8\n2 9 10 13 14 11 12 15 16\n[End]",
    };
    static const double want[] = {1, 2, 5, 6, 3, 4, 7, 8, 9, 10, 13, 14, 11, 12, 15, 16};
    for (size_t i = 0; i < COUNT(same); i++) {
        parse(same[i], i == 6 ? 2 : 0);
        ck_assert_msg(got.points == 2 && got.ports == 2 && got.freq[1] == 2.0, "%s", same[i]);
        ck_assert_msg(memcmp(got.data, want, sizeof want) == 0, "%s", same[i]);
    }
}
END_TEST

START_TEST(upper_triangle)
{
    parse("[Version] 2.0\n# Hz S RI\n[Number of Ports] 3\n[Number of Frequencies] 1\n[Matrix Format] UPPER\n[Network Data]\n"
          "0 11 0 12 0 13 0\n22 0 23 0 33 0\n[End]\n", 3);
    for (int i = 0; i < 3; i++)
        for (int j = 0; j < 3; j++)
            is(0, i, j, i < j ? 10 * (i + 1) + j + 1 : 10 * (j + 1) + i + 1, 0);
    ck_assert(got.freq[0] == 0.0 && got.matrix == LSTUB_MATRIX_UPPER);
}
END_TEST

/* Every number of ports, found from the lines and from what is given. */
START_TEST(port_counts)
{
    static char text[40000];
    for (int p = 1; p <= LSTUB_PORTS_MAX; p++)
        for (int given = 0; given < 2; given++) {
            int n = snprintf(text, sizeof text, "# Hz S RI\n");
            for (int k = 1; k <= 2; k++) {
                n += snprintf(text + n, sizeof text - (size_t)n, "%d", k);
                for (int i = 0; i < p * p; i++)
                    n += snprintf(text + n, sizeof text - (size_t)n, "%s%d %d", p > 2 && i > 0 && (i % p == 0 || i % p % 4 == 0) ? "\n " : " ", k * 1000 + i, -i);
                n += snprintf(text + n, sizeof text - (size_t)n, "\n");
            }
            parse(text, given ? p : 0);
            ck_assert_msg(got.ports == p && got.points == 2, "%d ports", p);
            for (int i = 0; i < p * p; i++) {
                double z[2] = {2000.0 + i, (double)-i};
                ck_assert(entry(1, p == 2 ? i % 2 : i / p, p == 2 ? i / 2 : i % p)[0] == z[0]);
                ck_assert(entry(1, p == 2 ? i % 2 : i / p, p == 2 ? i / 2 : i % p)[1] == z[1]);
            }
        }
}
END_TEST

/* ---- sources ------------------------------------------------------------------------------------------- */

typedef struct dribble {
    const char *text;
    size_t      left, most, fail_at, calls;
} dribble;

static size_t read_dribble(void *user, void *buffer, size_t bytes)
{
    dribble *d = user;
    size_t n = d->left < d->most ? d->left : d->most;
    if (++d->calls == d->fail_at)
        return (size_t)-1;
    n = n < bytes ? n : bytes;
    memcpy(buffer, d->text, n);
    d->text += n;
    d->left -= n;
    return n;
}

START_TEST(sources)
{
    static const char text[] = "\xEF\xBB\xBF! c\r\n# Hz S RI\r\n1 1 2\r\n2 3 4\r\n";
    lstub_source source;
    LSTUB_INIT(source);
    source.read = read_dribble;
    for (size_t most = 1; most < 12; most++) {
        dribble d = {text, sizeof text - 1, most, 0, 0};
        source.user = &d;
        teardown();
        assert_ok(lstub_touchstone_read(&source, 1, NULL, &file, &err), err);
        assert_ok(lstub_touchstone_get(file, &got, &err), err);
        ck_assert(got.points == 2 && got.freq[1] == 2.0 && got.data[3] == 4.0 && got.comment_count == 1);
        ck_assert_str_eq(got.comments[0], " c");
    }
    dribble d = {text, sizeof text - 1, 20, 2, 0};
    lstub_touchstone *none = NULL;
    source.user = &d;
    assert_refused(lstub_touchstone_read(&source, 1, NULL, &none, &err), LSTUB_E_READ, err, "after line 2");
    ck_assert_ptr_null(none);
    source.read = NULL;
    assert_refused(lstub_touchstone_read(&source, 1, NULL, &none, &err), LSTUB_E_NULL, err, "read");
    assert_refused(lstub_touchstone_read(NULL, 1, NULL, &none, &err), LSTUB_E_NULL, err, "source");
    assert_refused(lstub_touchstone_parse(NULL, 3, 1, NULL, &none, &err), LSTUB_E_NULL, err, "text");
    assert_refused(lstub_touchstone_parse("", 0, 1, NULL, NULL, &err), LSTUB_E_NULL, err, "out");
    assert_refused(lstub_touchstone_parse("", 0, 17, NULL, &none, &err), LSTUB_E_ARGUMENT, err, "ports = 17|<= 16");
    assert_refused(lstub_touchstone_parse("", 0, -1, NULL, &none, &err), LSTUB_E_ARGUMENT, err, "ports = -1");
    assert_refused(lstub_touchstone_load(NULL, 0, NULL, &none, &err), LSTUB_E_NULL, err, "path");
    assert_refused(lstub_touchstone_load(DATA("nowhere.s2p"), 0, NULL, &none, &err), LSTUB_E_READ, err, "nowhere.s2p");
    assert_refused(lstub_touchstone_load(DATA(""), 0, NULL, &none, &err), LSTUB_E_READ, err, "touchstone");
    assert_refused(lstub_touchstone_load(DATA("x.s32p"), 0, NULL, &none, &err), LSTUB_E_UNSUPPORTED, err, "x.s32p|16 ports");
    assert_refused(lstub_touchstone_get(NULL, &got, &err), LSTUB_E_NULL, err, "file");
    lstub_touchstone_destroy(NULL);
    ck_assert_ptr_null(none);
}
END_TEST

/* The name of the file counts, and the caller counts more. */
START_TEST(ports_of_the_name)
{
    lstub_touchstone *none = NULL;
    assert_refused(lstub_touchstone_load(DATA("splitter.s3p"), 2, NULL, &none, &err), LSTUB_E_FORMAT, err, "line 3, column 16|2 ports");
    load(DATA("splitter.s3p"));
    ck_assert_int_eq(got.ports, 3);
    assert_refused(lstub_touchstone_load(DATA("pair.ts"), 2, NULL, &none, &err), LSTUB_E_FORMAT, err, "line 4|[Number of Ports] = 4|says 2");
}
END_TEST

/* ---- what is refused ----------------------------------------------------------------------------------- */

#define V2 "[Version] 2.0\n# Hz S RI\n"
#define V2_1 V2 "[Number of Ports] 1\n[Number of Frequencies] 1\n"
#define V2_2 V2 "[Number of Ports] 2\n[Two-Port Data Order] 21_12\n[Number of Frequencies] 1\n"
#define V2_4 V2 "[Number of Ports] 4\n[Number of Frequencies] 1\n"

static const struct bad {
    const char *text;
    int32_t     ports;
    int         line;
    const char *words;
} bad[] = {
    {"", 0, 0, "no data"},
    {"! only words\n# Hz\n", 0, 2, "no data"},
    {"1 2 3\n", 1, 1, "line 1: |option line"},
    {"# GHz MHz\n1 2 3\n", 1, 1, "line 1, column 7|second unit of frequency|MHz"},
    {"# S S\n1 2 3\n", 1, 1, "column 5|second parameter"},
    {"# RI MA\n", 1, 1, "second format"},
    {"# R 50 R 75\n", 1, 1, "second reference"},
    {"# THz S RI\n", 1, 1, "line 1, column 3|'THz'"},
    {"# Hz S RI R\n", 1, 1, "column 12|R"},
    {"# Hz S RI R 0\n", 1, 1, "R = 0 ohm|> 0"},
    {"# Hz S RI R -50\n", 1, 1, "R = -50 ohm"},
    {"# Hz S RI R 1e999\n", 1, 1, "finite"},
    {"# Hz S RI R 50 75\n", 1, 1, "'75'"},
    {"# Hz S RI\n1 2 3\n# MHz S RI\n2 3 4\n", 1, 3, "line 3, column 1|other than that of line 1"},
    {"# Hz S RI\n1 2 3\n# X\n2 3 4\n", 1, 3, "'X'"},
    {"# Hz S RI\n1 2 x\n", 1, 2, "line 2, column 5|'x' is no number"},
    {"# Hz S RI\n1 2 nan\n", 1, 2, "'nan'"},
    {"# Hz S RI\n1 2 -inf\n", 1, 2, "'-inf'"},
    {"# Hz S RI\n1 2 3e\n", 1, 2, "'3e'"},
    {"# Hz S RI\n1 2 3,5\n", 1, 2, "'3,5'"},
    {"# Hz S RI\n1 2 1e309\n", 1, 2, "column 5|'1e309' is beyond"},
    {"# GHz S RI\n1e305 2 3\n", 1, 2, "frequency beyond"},
    {"# Hz S DB\n1 7000 3\n", 1, 2, "point 0, row 1, column 1: beyond"},
    {"# Hz Z RI R 1e10\n1 1e300 3\n", 1, 2, "beyond"},
    {"# Hz S RI\n-1 2 3\n", 1, 2, "frequency = -1 Hz|>= 0"},
    {"# Hz S RI\n1 2 3\n1 2 3\n", 1, 3, "line 3|1 Hz after 1 Hz|rise"},
    {"# MHz S RI\n2 2 3\n1 2 3\n", 1, 3, "1000000 Hz after 2000000 Hz"},
    {"# Hz S RI\n1 2 3 4\n", 1, 2, "line 2, column 7|3 numbers|1 port"},
    {"# Hz S RI\n1 2 3 4 5 6 7 8 9 10 11\n", 2, 2, "column 19|9 numbers"},
    {"# Hz S RI\n1 2 3 4 5 6 7 8 9\n2 3 4\n", 2, 3, "point 1 has 3 numbers of 9"},
    {"# Hz S RI\n1 2 3 4\n", 0, 2, "ambiguous|4 numbers"},
    {"# Hz S RI\n1 2 3 4 5\n2 2 3 4 5\n", 0, 2, "ambiguous|5 numbers|.sNp"},
    {"# Hz S RI\n1\n", 0, 2, "ambiguous|1 number "},
    {"# Hz G RI\n1 2 3\n", 1, 1, "G and H|two ports"},
    {"# Hz H RI\n1 2 3\n2 2 3\n", 0, 1, "G and H|two ports"},
    {"# Hz S RI\n1 2 3 4 5 6 7 8 9\n2 2 3 4 5 6 7 8 9\n1 1 1 1 1\n2 1 1 1\n", 2, 5, "noise|4 numbers"},
    {"# Hz S RI\n[Number of Ports] 1\n", 1, 2, "[Number of Ports]|does not begin with [Version] 2.0"},
    {"# Hz S RI\n1 2 3\n[End]\n", 1, 3, "version 1"},
    {"# Hz S RI\n[Version] 2.0\n", 1, 2, "must be the first"},
    {"[Version] 1.0\n", 1, 1, "'1.0'|2.0 or 2.1"},
    {"[Version] 2.0 2.0\n", 1, 1, "more than one word"},
    {"[Version\n", 1, 1, "']'"},
    {V2_1 "[Gain] 5\n", 1, 5, "line 5, column 1|[Gain] is no keyword"},
    {V2_1 "[A keyword that is longer than any other one is]\n", 1, 5, "no keyword of this standard is so long"},
    {V2_1 "[Number of Ports] 1\n", 1, 5, "a second time"},
    {V2_1 "5\n", 1, 5, "before [Network Data]"},
    {"[Version] 2.0\n[Number of Ports] 1\n[Number of Frequencies] 1\n[Network Data]\n", 0, 4, "option line"},
    {V2 "[Number of Frequencies] 1\n[Network Data]\n1 2 3\n[End]\n", 0, 4, "[Number of Ports] is missing"},
    {V2 "[Number of Ports] 1\n[Network Data]\n1 2 3\n[End]\n", 0, 4, "[Number of Frequencies] is missing"},
    {V2 "[Number of Ports] 2\n[Number of Frequencies] 1\n[Network Data]\n", 0, 5, "[Two-Port Data Order] is missing"},
    {V2_1 "[Two-Port Data Order] 21_12\n[Network Data]\n", 0, 6, "for two ports only"},
    {V2 "[Number of Ports] 0\n", 0, 3, "'0'|>= 1 and <= 16"},
    {V2 "[Number of Ports] 17\n", 0, 3, "'17'"},
    {V2 "[Number of Ports] 99999999999999999999999999\n", 0, 3, "'99999"},
    {V2 "[Number of Ports] -1\n", 0, 3, "'-1'"},
    {V2 "[Number of Ports] 2.0\n", 0, 3, "'2.0'"},
    {V2 "[Number of Ports]\n", 0, 3, "''"},
    {V2 "[Number of Frequencies] 0\n", 0, 3, "whole number >= 1"},
    {V2 "[Reference] 50\n", 0, 3, "[Number of Ports] is missing"},
    {V2_1 "[Reference] 50 75\n", 0, 5, "column 16|more in this list"},
    {V2_2 "[Reference] 50\n[Network Data]\n", 0, 7, "the list ends 1 short"},
    {V2_1 "[Reference] 0\n", 0, 5, "[Reference] = 0 ohm"},
    {V2_1 "[Matrix Format] Diagonal\n", 0, 5, "'Diagonal'|Full, Lower or Upper"},
    {V2_2 "[Two-Port Data Order] 12_21\n", 0, 6, "a second time"},
    {V2 "[Two-Port Data Order] 1\n", 0, 3, "21_12 or 12_21"},
    {V2_4 "[Mixed-Mode Order] D1,2 C1,2 S3\n[Network Data]\n", 0, 6, "1 short"},
    {V2_4 "[Mixed-Mode Order] D1,2 C1,2 S3 X4\n", 0, 5, "column 33|'X4'"},
    {V2_4 "[Mixed-Mode Order] D1,2 C1,2 S3 S5\n[Network Data]\n", 0, 6, "does not have"},
    {V2_4 "[Mixed-Mode Order] D1,2 C1,2 S3 S3\n[Network Data]\n", 0, 6, "two rows of one kind"},
    {V2_4 "[Mixed-Mode Order] D1,2 D3,4 C1,3 C2,4\n[Network Data]\n", 0, 6, "same partner"},
    {V2_4 "[Mixed-Mode Order] D1,2 S3 S4 S1\n[Network Data]\n", 0, 6, "one differential and one common"},
    {V2_4 "[Reference] 50 51 50 50\n[Mixed-Mode Order] D1,2 C1,2 S3 S4\n[Network Data]\n", 0, 7, "different references"},
    {V2_1 "[Network Data] 1\n", 0, 5, "stands alone"},
    {V2_1 "[End Information]\n", 0, 5, "without [Begin Information]"},
    {V2_1 "[Begin Information]\n[Network Data]\n1 2 3\n[End]\n", 0, 8, "ends without [End]"},
    {V2_1 "[Network Data]\n[Reference] 50\n", 0, 6, "[Reference] after [Network Data]"},
    {V2_1 "[Network Data]\n1 2 3\n", 0, 6, "ends without [End]"},
    {V2_1 "[End]\n", 0, 5, "[Network Data] is missing"},
    {V2_1 "[Network Data]\n[End]\n", 0, 6, "0 points|says 1"},
    {V2_1 "[Network Data]\n1 2\n[End]\n", 0, 6, "2 numbers of 3"},
    {V2_1 "[Network Data]\n1 2 3\n2 2 3\n[End]\n", 0, 7, "more points than [Number of Frequencies] = 1"},
    {V2_1 "[Network Data]\n1 2 3\n[End]\n1\n", 0, 8, "text after [End]"},
    {V2_1 "[Network Data]\n1 2 3\n[End]\n[End]\n", 0, 8, "text after [End]"},
    {V2_1 "[Network Data]\n1 2 3\n[Noise Data]\n", 0, 7, "[Number of Noise Frequencies] is missing"},
    {V2_1 "[Number of Noise Frequencies] 1\n[Network Data]\n", 0, 6, "two ports only"},
    {V2_2 "[Number of Noise Frequencies] 1\n[Network Data]\n1 1 1 2 2 3 3 4 4\n[End]\n", 0, 9, "0 lines of noise data|says 1"},
    {V2_2 "[Number of Noise Frequencies] 1\n[Network Data]\n1 1 1 2 2 3 3 4 4\n[Noise Data]\n1 1 1 1 1\n2 1 1 1 1\n[End]\n", 0, 11, "more noise"},
    {"\x1F\x8B\x08 packed", 0, 1, "gzip"},
    {"# Hz S RI\n1 \x01 2\n", 1, 2, "line 2, column 3|byte 0x01|not a text"},
};

START_TEST(refused)
{
    const struct bad *b = &bad[_i];
    lstub_touchstone *none = NULL;
    test_memory memory;
    lstub_allocator allocator = test_allocator(&memory);
    assert_refused(lstub_touchstone_parse(b->text, strlen(b->text), b->ports, &allocator, &none, &err), LSTUB_E_FORMAT, err, b->words);
    ck_assert_msg(err.index == b->line, "line %ld for '%s': %s", (long)err.index, b->text, err.message);
    ck_assert_ptr_null(none);
    ck_assert_int_eq(memory.live, 0);
}
END_TEST

START_TEST(refused_odd)
{
    static char text[200000];
    lstub_touchstone *none = NULL;
    size_t n = (size_t)sprintf(text, "# Hz S RI\n");
    assert_refused(lstub_touchstone_parse("# Hz S RI\n1 2\0 3", 16, 1, NULL, &none, &err), LSTUB_E_FORMAT, err, "line 2, column 4|0x00");
    memset(text + n, '1', 70000);                       /* a line without end */
    assert_refused(lstub_touchstone_parse(text, n + 70000, 1, NULL, &none, &err), LSTUB_E_FORMAT, err, "line 2|65535 bytes");
    memset(text + n, '!', 65535);
    memcpy(text + n + 65535, "\n1 2 3\n", 7);           /* the longest that may be */
    assert_ok(lstub_touchstone_parse(text, n + 65542, 1, NULL, &none, &err), err);
    lstub_touchstone_destroy(none);
    none = NULL;
    for (size_t i = 0; i < 60000; i += 2)
        memcpy(text + n + i, "1 ", 2);
    assert_refused(lstub_touchstone_parse(text, n + 60000, 0, NULL, &none, &err), LSTUB_E_FORMAT, err, "line 2, column|513|16 ports");
    for (size_t i = 0; i < 60000; i += 20)
        memcpy(text + n + i, i == 0 ? "1 2 3 4 5 6 7 8 9  \n" : "2 3 4 5 6 7 8 9    \n", 20);
    assert_refused(lstub_touchstone_parse(text, n + 60000, 0, NULL, &none, &err), LSTUB_E_FORMAT, err, "513|16 ports");
    memset(text + n, '7', 60000);                       /* one number of 60000 digits */
    memcpy(text + n + 60000, " 2 3\n", 5);
    assert_refused(lstub_touchstone_parse(text, n + 60005, 1, NULL, &none, &err), LSTUB_E_FORMAT, err, "beyond the range");
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("touchstone");
    TCase *files = tcase_create("files"), *input = tcase_create("input");
    tcase_add_checked_fixture(files, setup, teardown);
    tcase_add_checked_fixture(input, setup, teardown);
    tcase_add_test(files, version_1_two_ports);
    tcase_add_test(files, version_1_three_ports);
    tcase_add_test(files, version_2_mixed_mode);
    tcase_add_test(files, version_2_two_ports);
    tcase_add_test(files, option_lines);
    tcase_add_test(files, hybrids);
    tcase_add_test(files, layouts);
    tcase_add_test(files, upper_triangle);
    tcase_add_test(files, port_counts);
    tcase_add_test(files, sources);
    tcase_add_test(files, ports_of_the_name);
    tcase_add_loop_test(input, refused, 0, (int)COUNT(bad));
    tcase_add_test(input, refused_odd);
    suite_add_tcase(suite, files);
    suite_add_tcase(suite, input);
    return test_main(suite);
}
