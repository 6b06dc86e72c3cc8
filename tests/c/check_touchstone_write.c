/* Touchstone files, written: what is read back, what is refused, what becomes of the file; and ports in another order. */
#define _XOPEN_SOURCE 700   /* a limit on the length of files, folders */

#include "check_util.h"

#include <signal.h>
#include <sys/resource.h>
#include <sys/stat.h>
#include <unistd.h>

static lstub_error err;
static lstub_touchstone_data made, got;
static lstub_touchstone *file;
static double freq[8], data[8 * 2 * 256], reference[16];

/* ---- a sink in memory ---------------------------------------------------------------------------------- */

typedef struct memory_sink {
    char   text[400000];
    size_t used, most;             /* most: takes no more */
    int32_t answer;
} memory_sink;

static memory_sink sunk;
static lstub_sink  sink;

static int32_t write_memory(void *user, const void *bytes, size_t count)
{
    memory_sink *s = user;
    if (s->used + count > s->most)
        return s->answer;
    memcpy(s->text + s->used, bytes, count);
    s->used += count;
    s->text[s->used] = '\0';
    return 0;
}

/* Five points of `ports` ports, numbers of size 1e-3 to 1 and any angle, symmetric if wanted. */
static void fill(int ports, int symmetric)
{
    LSTUB_INIT(made);
    made.ports = ports;
    made.points = 5;
    made.freq = freq;
    made.data = data;
    made.reference = reference;
    for (uint64_t k = 0; k < 5; k++) {
        freq[k] = k == 0 ? 0.0 : freq[k - 1] + 1e9 * test_random(1, k);
        for (int i = 0; i < ports; i++)
            for (int j = 0; j < ports; j++) {
                uint64_t low = (uint64_t)(symmetric && j < i ? 16 * j + i : 16 * i + j), key = 512 * k + 2 * low;
                double *z = data + 2 * ((int)k * ports * ports + i * ports + j);
                double size = pow(10.0, -3.0 * test_random(2, key)), angle = 8.0 * test_random(3, key);
                z[0] = size * cos(angle);
                z[1] = size * sin(angle);
            }
    }
    for (int i = 0; i < 16; i++)
        reference[i] = 50.0;
}

static void setup(void)
{
    LSTUB_INIT(err);
    LSTUB_INIT(got);
    LSTUB_INIT(sink);
    file = NULL;
    sink.write = write_memory;
    sink.user = &sunk;
    sunk.used = 0;
    sunk.most = sizeof sunk.text - 1;
    sunk.answer = 77;
    fill(2, 0);
}

static void teardown(void)
{
    lstub_touchstone_destroy(file);
    file = NULL;
}

static void there_and_back(void)
{
    teardown();
    sunk.used = 0;
    assert_ok(lstub_touchstone_write(&made, &sink, &err), err);
    assert_ok(lstub_touchstone_parse(sunk.text, sunk.used, 0, NULL, &file, &err), err);
    assert_ok(lstub_touchstone_get(file, &got, &err), err);
    ck_assert(got.ports == made.ports && got.points == made.points && got.format == made.format && got.unit == made.unit);
    ck_assert(got.version == (made.version ? made.version : 1) && got.parameter == (made.parameter ? made.parameter : LSTUB_NETWORK_S));
    ck_assert(got.matrix == made.matrix && got.order == made.order);
    ck_assert_int_eq(memcmp(got.freq, made.freq, made.points * sizeof *made.freq), 0);
    for (int i = 0; i < made.ports; i++)
        ck_assert(got.reference[i] == reference[i]);
}

static size_t numbers(void) { return 2 * made.points * (size_t)(made.ports * made.ports); }

/* Every number within rel of the size of its complex number. */
static void close_to(double rel)
{
    for (size_t i = 0; i < numbers(); i += 2) {
        double off = hypot(got.data[i] - data[i], got.data[i + 1] - data[i + 1]), size = hypot(data[i], data[i + 1]);
        ck_assert_msg(off <= rel * size, "number %zu: off by %.3g of itself", i / 2, off / size);
    }
}

/* ---- round trips --------------------------------------------------------------------------------------- */

/* Ports 1 to 16, version 1 and 2, all units: RI gives the same bits, MA and DB 1e-15 of numbers down to 1e-3. (Half the last
** bit of 60 dB is 4e-16 of the number.) */
START_TEST(round_trips)
{
    fill(_i + 1, 0);
    for (made.version = 0; made.version <= 2; made.version++)
        for (made.format = 0; made.format <= 2; made.format++)
            for (made.unit = 0; made.unit <= 3; made.unit++)
                for (made.digits = 0; made.digits <= 17; made.digits += 17) {
                    for (int i = 0; i < 16; i++)
                        reference[i] = made.version == 2 ? 40.1 + i : 75.3;
                    there_and_back();
                    if (made.format == LSTUB_FORMAT_RI)
                        ck_assert_int_eq(memcmp(got.data, data, numbers() * sizeof *data), 0);
                    close_to(1e-15);
                }
}
END_TEST

/* Normalised numbers (version 1) come back to rounding, others (version 2) bit by bit. */
START_TEST(parameters)
{
    static const int32_t kinds[] = {LSTUB_NETWORK_Z, LSTUB_NETWORK_Y, LSTUB_NETWORK_G, LSTUB_NETWORK_H};
    for (size_t i = 0; i < COUNT(kinds); i++)
        for (made.version = 1; made.version <= 2; made.version++) {
            reference[0] = reference[1] = 42.7;
            made.parameter = kinds[i];
            there_and_back();
            close_to(5e-16);
            if (made.version == 2)
                ck_assert_int_eq(memcmp(got.data, data, numbers() * sizeof *data), 0);
        }
    made.version = 1;
    made.parameter = LSTUB_NETWORK_Y;       /* 2 S of 50 ohm is 100 */
    reference[0] = reference[1] = 50.0;
    data[0] = 2.0;
    data[1] = 0.0;
    there_and_back();
    ck_assert_ptr_nonnull(strstr(sunk.text, "# Hz Y RI R 50\n0 100 0 "));
}
END_TEST

START_TEST(forms_of_the_matrix)
{
    made.version = 2;
    made.order = LSTUB_ORDER_12_21;
    there_and_back();
    ck_assert_int_eq(memcmp(got.data, data, numbers() * sizeof *data), 0);
    made.order = 0;
    for (int p = 1; p <= 16; p += 5)
        for (int32_t matrix = LSTUB_MATRIX_LOWER; matrix <= LSTUB_MATRIX_UPPER; matrix++) {
            fill(p, 1);
            made.version = 2;
            made.matrix = matrix;
            there_and_back();
            ck_assert_int_eq(memcmp(got.data, data, numbers() * sizeof *data), 0);
        }
    fill(4, 1);
    made.version = 2;
    made.matrix = LSTUB_MATRIX_LOWER;
    data[2 * (2 * 16 + 4 * 3 + 1)] += 5e-14;      /* within rounding of symmetric */
    assert_ok(lstub_touchstone_write(&made, &sink, &err), err);
    data[2 * (2 * 16 + 4 * 3 + 1)] += 1e-6;
    assert_refused(lstub_touchstone_write(&made, &sink, &err), LSTUB_E_ARGUMENT, err, "data[2]|[3][1]|[1][3]|1e-06|symmetry");
    ck_assert_int_eq(err.index, 2);
}
END_TEST

START_TEST(mixed_mode)
{
    static const lstub_touchstone_row rows[] = {{LSTUB_ROW_DIFFERENTIAL, 2, 0}, {LSTUB_ROW_SINGLE, 3, -1}, {LSTUB_ROW_COMMON, 2, 0}, {LSTUB_ROW_SINGLE, 1, -1}};
    fill(4, 0);
    made.version = 2;
    made.rows = rows;
    there_and_back();
    ck_assert_ptr_nonnull(strstr(sunk.text, "\n[Mixed-Mode Order] D3,1 S4 C3,1 S2\n"));
    ck_assert_int_eq(memcmp(got.rows, rows, sizeof rows), 0);
    reference[2] = 51;
    assert_refused(lstub_touchstone_write(&made, &sink, &err), LSTUB_E_ARGUMENT, err, "rows|different references");
}
END_TEST

/* What is read can be written, comments and all, and reads the same; without comments it is even the same text. */
START_TEST(read_and_written_again)
{
    static const char *const comments[] = {" Port[1] = left", "", " \tPort[2] = right \xC3\xA9 # [x] !"};
    static char first[200000];
    fill(5, 0);
    made.comments = comments;
    made.comment_count = 3;
    there_and_back();
    ck_assert_uint_eq(got.comment_count, 3);
    for (size_t i = 0; i < 3; i++)
        ck_assert_str_eq(got.comments[i], comments[i]);
    strcpy(first, sunk.text);
    sunk.used = 0;
    assert_ok(lstub_touchstone_write(&got, &sink, &err), err);
    ck_assert_str_eq(sunk.text, first);
}
END_TEST

/* The text itself, once. Four pairs a line, rows apart. */
START_TEST(the_text)
{
    static const double f[] = {1.5e9}, z[] = {1, -1, 2, 0.25}, thirds[] = {1.0 / 3.0, -2.0 / 3.0};
    static double five[50];
    LSTUB_INIT(made);
    made.ports = 1;
    made.points = 1;
    made.freq = f;
    made.data = z;
    made.unit = LSTUB_UNIT_GHZ;
    assert_ok(lstub_touchstone_write(&made, &sink, &err), err);
    ck_assert_str_eq(sunk.text, "# GHz S RI R 50\n1.5 1 -1\n");
    sunk.used = 0;
    made.data = thirds;
    made.digits = 4;
    made.version = 2;
    assert_ok(lstub_touchstone_write(&made, &sink, &err), err);
    ck_assert_str_eq(sunk.text, "[Version] 2.0\n# GHz S RI R 50\n[Number of Ports] 1\n[Number of Frequencies] 1\n[Reference] 50\n"
                                "[Matrix Format] Full\n[Network Data]\n1.5 0.3333 -0.6667\n[End]\n");
    sunk.used = 0;
    made.version = 1;
    made.ports = 5;
    made.data = five;
    assert_ok(lstub_touchstone_write(&made, &sink, &err), err);
    ck_assert_str_eq(sunk.text, "# GHz S RI R 50\n1.5 0 0 0 0 0 0 0 0\n 0 0\n 0 0 0 0 0 0 0 0\n 0 0\n 0 0 0 0 0 0 0 0\n 0 0\n"
                                " 0 0 0 0 0 0 0 0\n 0 0\n 0 0 0 0 0 0 0 0\n 0 0\n");
}
END_TEST

/* ---- what is refused ----------------------------------------------------------------------------------- */

#define refused(words)                                                                                                \
    do {                                                                                                              \
        assert_refused(lstub_touchstone_write(&made, &sink, &err), LSTUB_E_ARGUMENT, err, words);                      \
        ck_assert_uint_eq(sunk.used, 0);                                                                              \
    } while (0)

#define bad_member(member, value, words)                                                                              \
    do {                                                                                                              \
        fill(2, 0);                                                                                                   \
        made.member = value;                                                                                          \
        refused(words);                                                                                               \
    } while (0)

#define bad_value(place, value, words)                                                                                \
    do {                                                                                                              \
        fill(2, 0);                                                                                                   \
        place = value;                                                                                                \
        refused(words);                                                                                               \
    } while (0)

START_TEST(refusals)
{
    static const char *const newline[] = {"fine", "two\nlines"};
    static const lstub_touchstone_row rows[2] = {{0, 0, -1}, {0, 1, -1}}, twice[2] = {{0, 0, -1}, {0, 0, -1}};
    bad_member(ports, 0, "ports = 0|>= 1|16");
    bad_member(ports, 17, "ports = 17");
    bad_member(version, 3, "version = 3");
    bad_member(parameter, 7, "parameter = 7");
    bad_member(parameter, -1, "parameter = -1");
    bad_member(parameter, LSTUB_NETWORK_ABCD, "ABCD");
    bad_member(format, 3, "format = 3");
    bad_member(unit, 4, "unit = 4");
    bad_member(matrix, 1, "matrix|version 2");
    bad_member(order, 1, "order|version 2");
    bad_member(rows, rows, "rows|version 2");
    bad_member(digits, 18, "digits = 18|17");
    bad_member(points, 0, "points = 0");
    fill(3, 0);
    made.parameter = LSTUB_NETWORK_H;
    refused("two ports|ports = 3");
    fill(3, 0);
    made.version = 2;
    made.order = 1;
    refused("two ports|ports = 3");
    fill(2, 0);
    made.version = 2;
    made.rows = twice;
    refused("rows|two rows");
    made.rows = rows;
    made.parameter = LSTUB_NETWORK_G;
    refused("mixed-mode");
    fill(2, 0);
    made.comments = newline;
    made.comment_count = 2;
    refused("comments[1]|one line");
    bad_value(freq[3], NAN, "freq[3] = nan Hz");
    bad_value(freq[0], -1.0, "freq[0] = -1 Hz|>= 0");
    bad_value(freq[1], 0.0, "freq[1] = 0 Hz after 0 Hz|rise");
    bad_value(data[2 * 4 * 2 + 5], INFINITY, "data[2][1][0]|inf");
    bad_value(reference[1], 75.0, "port 1 = 75 ohm|50 ohm");
    bad_value(reference[0], 0.0, "port 0 = 0 ohm|> 0");
    fill(2, 0);
    data[2] = data[3] = 0.0;
    made.format = LSTUB_FORMAT_DB;
    refused("data[0][0][1]|no decibels");
    fill(2, 0);
    data[0] = 1e300;
    made.parameter = LSTUB_NETWORK_Y;
    reference[0] = reference[1] = 1e9;
    refused("data[0][0][0]|range of a double");
}
END_TEST

START_TEST(null_and_size)
{
    assert_refused(lstub_touchstone_write(NULL, &sink, &err), LSTUB_E_NULL, err, "data");
    assert_refused(lstub_touchstone_write(&made, NULL, &err), LSTUB_E_NULL, err, "sink");
    assert_refused(lstub_touchstone_save(&made, NULL, &err), LSTUB_E_NULL, err, "path");
    made.freq = NULL;
    assert_refused(lstub_touchstone_write(&made, &sink, &err), LSTUB_E_NULL, err, "freq");
    made.freq = freq;
    made.data = NULL;
    assert_refused(lstub_touchstone_write(&made, &sink, &err), LSTUB_E_NULL, err, "data");
    made.data = data;
    made.comment_count = 1;
    assert_refused(lstub_touchstone_write(&made, &sink, &err), LSTUB_E_NULL, err, "comments");
    made.comment_count = 0;
    made.size = 20;
    assert_refused(lstub_touchstone_write(&made, &sink, &err), LSTUB_E_SIZE, err, "data");
    made.size = sizeof made;
    sink.write = NULL;
    assert_refused(lstub_touchstone_write(&made, &sink, &err), LSTUB_E_NULL, err, "write");
    sink.write = write_memory;
    sunk.most = 10;
    assert_refused(lstub_touchstone_write(&made, &sink, &err), LSTUB_E_WRITE, err, "77");
    ck_assert_uint_eq(sunk.used, 0);
}
END_TEST

/* ---- files --------------------------------------------------------------------------------------------- */

static char folder[64], path[128];

static void make_folder(void)
{
    setup();
    strcpy(folder, "touchstone-XXXXXX");
    ck_assert_ptr_nonnull(mkdtemp(folder));
    snprintf(path, sizeof path, "%s/out.s2p", folder);
}

static void remove_folder(void)
{
    teardown();
    remove(path);
    ck_assert_msg(rmdir(folder) == 0, "%s is not empty: something was left in it", folder);
}

static void expect_file(const char *want)
{
    static char is[400000];
    FILE *f = fopen(path, "rb");
    ck_assert_ptr_nonnull(f);
    is[fread(is, 1, sizeof is - 1, f)] = '\0';
    fclose(f);
    ck_assert_str_eq(is, want);
}

static void put_file(const char *content)
{
    FILE *f = fopen(path, "wb");
    ck_assert_ptr_nonnull(f);
    fputs(content, f);
    fclose(f);
}

START_TEST(saved)
{
    assert_ok(lstub_touchstone_write(&made, &sink, &err), err);
    assert_ok(lstub_touchstone_save(&made, path, &err), err);      /* new */
    expect_file(sunk.text);
    put_file("something longer or shorter that stood here");
    assert_ok(lstub_touchstone_save(&made, path, &err), err);      /* over another */
    expect_file(sunk.text);
    put_file("");
    assert_ok(lstub_touchstone_save(&made, path, &err), err);      /* into an empty one */
    expect_file(sunk.text);
    assert_ok(lstub_touchstone_load(path, 0, NULL, &file, &err), err);
    assert_ok(lstub_touchstone_get(file, &got, &err), err);
    ck_assert_int_eq(memcmp(got.data, data, numbers() * sizeof *data), 0);
}
END_TEST

/* Whatever goes wrong, what stood there still stands. */
START_TEST(not_saved)
{
    static const char *const before[] = {"what stood there\n", ""};
    struct rlimit limit, small;
    fill(16, 0);
    signal(SIGXFSZ, SIG_IGN);
    ck_assert_int_eq(getrlimit(RLIMIT_FSIZE, &limit), 0);
    for (size_t i = 0; i < 2; i++) {
        put_file(before[i]);
        small = limit;
        small.rlim_cur = 5000;
        ck_assert_int_eq(setrlimit(RLIMIT_FSIZE, &small), 0);      /* as on a full disk */
        int32_t status = lstub_touchstone_save(&made, path, &err);
        ck_assert_int_eq(setrlimit(RLIMIT_FSIZE, &limit), 0);
        ck_assert_msg(status == LSTUB_E_WRITE && strstr(err.message, "out.s2p") != NULL && strstr(err.message, "large") != NULL, "%s", err.message);
        expect_file(before[i]);
        data[7] = NAN;
        assert_refused(lstub_touchstone_save(&made, path, &err), LSTUB_E_ARGUMENT, err, "data[0]");
        expect_file(before[i]);
        data[7] = 0.0;
    }
    assert_refused(lstub_touchstone_save(&made, folder, &err), LSTUB_E_WRITE, err, folder);
    assert_refused(lstub_touchstone_save(&made, "touchstone-nowhere/x.s2p", &err), LSTUB_E_WRITE, err, "touchstone-nowhere/x.s2p");
    memset(sunk.text, 'x', 5000);
    sunk.text[5000] = '\0';
    assert_refused(lstub_touchstone_save(&made, sunk.text, &err), LSTUB_E_WRITE, err, "too long");
}
END_TEST

/* A device is written to, not replaced. */
START_TEST(devices)
{
    struct stat before, after;
    ck_assert_int_eq(stat("/dev/null", &before), 0);
    assert_ok(lstub_touchstone_save(&made, "/dev/null", &err), err);
    ck_assert_int_eq(stat("/dev/null", &after), 0);
    ck_assert(S_ISCHR(after.st_mode) && before.st_ino == after.st_ino);
    if (access("/dev/full", W_OK) == 0)
        assert_refused(lstub_touchstone_save(&made, "/dev/full", &err), LSTUB_E_WRITE, err, "/dev/full");
}
END_TEST

/* ---- ports in another order ---------------------------------------------------------------------------- */

START_TEST(port_map)
{
    static const int32_t map[] = {3, 0, 2, 1}, two[] = {3, 1};
    static double src[3 * 32], dst[3 * 32];
    for (int i = 0; i < 3 * 32; i++)
        src[i] = i;
    assert_ok(lstub_port_map(src, 3, 4, map, 4, dst, &err), err);
    for (int k = 0; k < 3; k++)
        for (int i = 0; i < 4; i++)
            for (int j = 0; j < 4; j++)
                for (int c = 0; c < 2; c++)
                    ck_assert(dst[2 * (16 * k + 4 * i + j) + c] == 2 * (16 * k + 4 * map[i] + map[j]) + c);
    assert_ok(lstub_port_map(src, 3, 4, two, 2, src, &err), err);       /* in place, fewer */
    for (int k = 0; k < 3; k++)
        for (int i = 0; i < 2; i++)
            for (int j = 0; j < 2; j++)
                ck_assert(src[2 * (4 * k + 2 * i + j)] == 2 * (16 * k + 4 * two[i] + two[j]));
    assert_ok(lstub_port_map(NULL, 0, 4, map, 4, NULL, &err), err);
}
END_TEST

START_TEST(port_map_refusals)
{
    static const int32_t high[] = {0, 4}, low[] = {-1, 0}, same[] = {1, 1};
    double dst[32];
    poison(dst);
    assert_refused(lstub_port_map(data, 1, 4, high, 2, dst, &err), LSTUB_E_ARGUMENT, err, "map[1] = 4|ports = 4");
    ck_assert_int_eq(err.index, 1);
    assert_refused(lstub_port_map(data, 1, 4, low, 2, dst, &err), LSTUB_E_ARGUMENT, err, "map[0] = -1");
    assert_refused(lstub_port_map(data, 1, 4, same, 2, dst, &err), LSTUB_E_ARGUMENT, err, "map[1] = 1|same port");
    assert_refused(lstub_port_map(data, 1, 4, high, 0, dst, &err), LSTUB_E_ARGUMENT, err, "count = 0");
    assert_refused(lstub_port_map(data, 1, 1, high, 2, dst, &err), LSTUB_E_ARGUMENT, err, "count = 2");
    assert_refused(lstub_port_map(data, 1, 17, high, 2, dst, &err), LSTUB_E_ARGUMENT, err, "ports = 17");
    assert_refused(lstub_port_map(NULL, 1, 4, low, 2, dst, &err), LSTUB_E_NULL, err, "src");
    assert_refused(lstub_port_map(data, 1, 4, low, 2, NULL, &err), LSTUB_E_NULL, err, "dst");
    assert_refused(lstub_port_map(data, 1, 4, NULL, 2, dst, &err), LSTUB_E_NULL, err, "map");
    assert_untouched(dst);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("touchstone_write");
    TCase *trips = tcase_create("trips"), *input = tcase_create("input"), *files = tcase_create("files"), *ports = tcase_create("ports");
    tcase_add_checked_fixture(trips, setup, teardown);
    tcase_add_checked_fixture(input, setup, teardown);
    tcase_add_checked_fixture(files, make_folder, remove_folder);
    tcase_add_checked_fixture(ports, setup, teardown);
    tcase_add_loop_test(trips, round_trips, 0, LSTUB_PORTS_MAX);
    tcase_add_test(trips, parameters);
    tcase_add_test(trips, forms_of_the_matrix);
    tcase_add_test(trips, mixed_mode);
    tcase_add_test(trips, read_and_written_again);
    tcase_add_test(trips, the_text);
    tcase_add_test(input, refusals);
    tcase_add_test(input, null_and_size);
    tcase_add_test(files, saved);
    tcase_add_test(files, not_saved);
    tcase_add_test(files, devices);
    tcase_add_test(ports, port_map);
    tcase_add_test(ports, port_map_refusals);
    suite_add_tcase(suite, trips);
    suite_add_tcase(suite, input);
    suite_add_tcase(suite, files);
    suite_add_tcase(suite, ports);
    return test_main(suite);
}
