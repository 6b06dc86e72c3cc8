/* Touchstone files cut short, changed at random, and read with little memory: refused or right, and nothing left behind. */
#include "check_util.h"

#define DATA(name) LSTUB_TEST_DATA "/touchstone/" name

static lstub_error err;

static void setup(void) { LSTUB_INIT(err); }

static size_t slurp(const char *path, char *text, size_t room)
{
    FILE *f = fopen(path, "rb");
    size_t n;
    ck_assert_ptr_nonnull(f);
    n = fread(text, 1, room, f);
    fclose(f);
    return n;
}

static const char *const samples[] = {DATA("amplifier.s2p"), DATA("splitter.s3p"), DATA("pair.ts"), DATA("stage.ts")};

/* Read, and either fine or refused with a line and nothing left behind; the bytes in a block of their own length. */
static void survives(const char *text, size_t n, int32_t ports)
{
    lstub_touchstone *made = NULL;
    lstub_touchstone_data got;
    test_memory memory;
    lstub_allocator allocator = test_allocator(&memory);
    char *own = malloc(n > 0 ? n : 1);
    memcpy(own, text, n);
    LSTUB_INIT(err);
    int32_t status = lstub_touchstone_parse(own, n, ports, &allocator, &made, &err);
    ck_assert_msg(status == LSTUB_OK || status == LSTUB_E_FORMAT, "%s", err.message);
    ck_assert((made != NULL) == (status == LSTUB_OK));
    if (made != NULL) {
        LSTUB_INIT(got);
        assert_ok(lstub_touchstone_get(made, &got, &err), err);
        for (size_t i = 0; i < 2 * got.points * (size_t)(got.ports * got.ports); i++)
            ck_assert(isfinite(got.data[i]));
        for (size_t i = 0; i < got.points; i++)
            ck_assert(got.freq[i] >= 0.0 && (i == 0 || got.freq[i] > got.freq[i - 1]));
        for (size_t i = 0; i < got.comment_count; i++)
            ck_assert(strlen(got.comments[i]) < n);
    } else {
        char line[40];
        sprintf(line, "line %ld", (long)err.index);
        ck_assert_msg(strncmp(err.message, line, strlen(line)) == 0, "%s", err.message);
    }
    lstub_touchstone_destroy(made);
    ck_assert_int_eq(memory.live, 0);
    free(own);
}

START_TEST(truncated)
{
    static char text[4096];
    size_t n = slurp(samples[_i], text, sizeof text);
    lstub_touchstone *none = NULL;
    for (size_t cut = 0; cut <= n; cut++) {
        survives(text, cut, 0);
        if (_i >= 2 && cut < n - 2) {                   /* version 2 knows where it ends */
            ck_assert_int_eq(lstub_touchstone_parse(text, cut, 0, NULL, &none, &err), LSTUB_E_FORMAT);
            ck_assert_ptr_null(none);
        }
    }
}
END_TEST

START_TEST(mutated)
{
    static const char *const pieces[] = {"\n", "[", "]", "#", "!", " ", "-", "1e308", "1e-400", "nan", "\r", "\t", "[End]\n", "[Network Data]\n", "99999999999999999999", ",", ".", "\xFF",
                                         "[Version] 2.0\n", "1 2 3 4 5\n", "D1,2 ", "0"};
    static char text[8192], original[4096];
    size_t n = slurp(samples[_i], original, sizeof original);
    for (uint64_t run = 0; run < 3000; run++) {
        size_t m = n, edits = 1 + (size_t)(4 * test_random(21, run));
        memcpy(text, original, n);
        for (uint64_t e = 0; e < edits; e++) {
            uint64_t key = 8 * run + e;
            size_t at = (size_t)((double)m * test_random(22, key)), kind = (size_t)(4 * test_random(23, key));
            const char *piece = pieces[(size_t)((double)COUNT(pieces) * test_random(24, key))];
            size_t length = kind == 0 ? 1 : kind == 1 ? (size_t)(30 * test_random(25, key)) : strlen(piece);
            if (kind == 0) {
                text[at] = (char)(int)(256 * test_random(26, key));
            } else if (kind == 1) {                     /* taken out */
                length = length < m - at ? length : m - at;
                memmove(text + at, text + at + length, m - at - length);
                m -= length;
            } else {                                    /* put in */
                memmove(text + at + length, text + at, m - at);
                memcpy(text + at, piece, length);
                m += length;
            }
        }
        survives(text, m, (int32_t)(run % 5));
    }
}
END_TEST

/* Memory that ends at any call: named, and nothing left behind. */
START_TEST(no_memory)
{
    static char text[4096];
    size_t n = slurp(samples[_i], text, sizeof text);
    long fail = 1;
    for (;; fail++) {
        lstub_touchstone *made = NULL;
        test_memory memory;
        lstub_allocator allocator = test_allocator(&memory);
        memory.fail_at = fail;
        LSTUB_INIT(err);
        int32_t status = lstub_touchstone_parse(text, n, 0, &allocator, &made, &err);
        if (status == LSTUB_OK) {
            lstub_touchstone_destroy(made);
            ck_assert_int_eq(memory.live, 0);
            if (memory.calls < fail)
                break;
            continue;               /* it did without: only room was to be saved */
        }
        ck_assert_int_eq(status, LSTUB_E_MEMORY);
        ck_assert(made == NULL && memory.live == 0);
    }
    ck_assert(fail > 5);
}
END_TEST

/* What a file claims costs nothing: memory follows what is there. */
static size_t most_asked;

static void *weighing_allocate(void *user, size_t bytes)
{
    (void)user;
    most_asked = bytes > most_asked ? bytes : most_asked;
    return malloc(bytes);
}

static void weighing_release(void *user, void *memory)
{
    (void)user;
    free(memory);
}

START_TEST(claims_cost_nothing)
{
    static const char text[] = "[Version] 2.0\n# Hz S RI\n[Number of Ports] 1\n[Number of Frequencies] 9007199254740992\n[Network Data]\n1 2 3\n2 2 3\n[End]\n";
    lstub_touchstone *none = NULL;
    lstub_allocator allocator;
    LSTUB_INIT(allocator);
    allocator.allocate = weighing_allocate;
    allocator.release = weighing_release;
    assert_refused(lstub_touchstone_parse(text, sizeof text - 1, 0, &allocator, &none, &err), LSTUB_E_FORMAT, err, "2 points|9007199254740992");
    ck_assert_uint_lt(most_asked, 200000);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("touchstone_hostile");
    TCase *hostile = tcase_create("hostile");
    tcase_add_checked_fixture(hostile, setup, NULL);
    tcase_set_timeout(hostile, 120);
    tcase_add_loop_test(hostile, truncated, 0, (int)COUNT(samples));
    tcase_add_loop_test(hostile, mutated, 0, (int)COUNT(samples));
    tcase_add_loop_test(hostile, no_memory, 0, (int)COUNT(samples));
    tcase_add_test(hostile, claims_cost_nothing);
    suite_add_tcase(suite, hostile);
    return test_main(suite);
}
