/* What the C suites share: comparisons that say what they compared, a counting allocator, a small board. */
#ifndef CHECK_UTIL_H
#define CHECK_UTIL_H

#include "libstub.h"

#include <check.h>
#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define COUNT(a) (sizeof(a) / sizeof(a)[0])
#define MIL 25.4e-6

/* Options of the closed forms, for suites about rules, plans and sums rather than fields: a thousandth of the time. */
#define LOADED (&(lstub_model_options){sizeof(lstub_model_options), LSTUB_FIDELITY_LOADED, 0, 0.0, 0, 0, NULL})

/*
** Within rel of `want` or within abs, whichever is wider. NaN equals NaN, an infinity itself. `source` says where
** `want` comes from: a paper, a derivation, an identity; an expected value without one is refused.
*/
#define assert_close(got, want, rel, abs, source) assert_close_at(__FILE__, __LINE__, got, want, rel, abs, source)

static inline void assert_close_at(const char *file, int line, double got, double want, double rel, double abs,
                                   const char *source)
{
    double room = fmax(abs, rel * fabs(want));
    int    same = (isnan(want) && isnan(got)) || got == want;
    ck_assert_msg(source != NULL && source[0] != '\0', "%s:%d: an expected value without a source", file, line);
    ck_assert_msg(same || fabs(got - want) <= room, "%s:%d: got %.17g, want %.17g +- %.3g, off by %.3g (%s)", file,
                  line, got, want, room, got - want, source);
}

/* A library call that must succeed, with its message where it does not. */
#define assert_ok(call, err)                                                                                          \
    do {                                                                                                              \
        int32_t status_ = (call);                                                                                     \
        ck_assert_msg(status_ == LSTUB_OK, "%s: %s: %s", #call, lstub_status_name(status_), (err).message);           \
    } while (0)

/*
** A library call that must fail with `want`, and whose message must hold every word of `words` (words apart by '|'):
** the argument's name, its value, its unit, its limit.
*/
#define assert_refused(call, want, err, words)                                                                        \
    do {                                                                                                              \
        LSTUB_INIT(err);                                                                                              \
        assert_refused_at(__FILE__, __LINE__, #call, (call), want, &(err), words);                                    \
    } while (0)

static inline void assert_refused_at(const char *file, int line, const char *call, int32_t got, int32_t want,
                                     const lstub_error *err, const char *words)
{
    char word[128];
    ck_assert_msg(got == want, "%s:%d: %s: got %s, want %s; message: %s", file, line, call, lstub_status_name(got),
                  lstub_status_name(want), err->message);
    ck_assert_msg(err->status == want, "%s:%d: %s: err.status is %s", file, line, call, lstub_status_name(err->status));
    ck_assert_msg(memchr(err->message, '\0', sizeof err->message) != NULL, "%s:%d: message has no end", file, line);
    while (*words != '\0') {
        size_t n = strcspn(words, "|");
        ck_assert_msg(n < sizeof word, "%s:%d: word too long", file, line);
        memcpy(word, words, n);
        word[n] = '\0';
        ck_assert_msg(strstr(err->message, word) != NULL, "%s:%d: %s: no '%s' in the message '%s'", file, line, call,
                      word, err->message);
        words += n + (words[n] == '|');
    }
}

/* An allocator that counts, and fails at the call number fail_at (from 1; 0: never). */
typedef struct test_memory {
    long live, calls, fail_at;
} test_memory;

static inline void *test_allocate(void *user, size_t bytes)
{
    test_memory *memory = user;
    void        *block;
    if (++memory->calls == memory->fail_at)
        return NULL;
    block = malloc(bytes ? bytes : 1);
    memory->live += block != NULL;
    return block;
}

static inline void test_release(void *user, void *block)
{
    ((test_memory *)user)->live -= block != NULL;
    free(block);
}

static inline lstub_allocator test_allocator(test_memory *memory)
{
    lstub_allocator a;
    memset(memory, 0, sizeof *memory);
    LSTUB_INIT(a);
    a.allocate = test_allocate;
    a.release = test_release;
    a.user = memory;
    return a;
}

/* Fills a struct's members, not its size, with a pattern that no result has: what stays is untouched. */
#define POISON 0xA5
#define poison(x) (memset(&(x), POISON, sizeof(x)), memcpy(&(x), &(size_t){sizeof(x)}, sizeof(size_t)))

static inline int poisoned(const void *data, size_t bytes)
{
    const unsigned char *p = data;
    for (size_t i = 0; i < bytes; i++)
        if (p[i] != POISON)
            return 0;
    return 1;
}
#define assert_untouched(x)                                                                                           \
    ck_assert_msg(poisoned((const char *)&(x) + sizeof(size_t), sizeof(x) - sizeof(size_t)), "%s was written", #x)

/* A counter-based random number in [0, 1): the same for the same (seed, n) everywhere. */
static inline double test_random(uint64_t seed, uint64_t n)
{
    uint64_t x = seed * UINT64_C(0x9E3779B97F4A7C15) + n * UINT64_C(0xD1B54A32D192ED03);
    x = (x ^ (x >> 30)) * UINT64_C(0xBF58476D1CE4E5B9);
    x = (x ^ (x >> 27)) * UINT64_C(0x94D049BB133111EB);
    x ^= x >> 31;
    return (double)(x >> 11) * 0x1p-53;
}

static inline int test_main(Suite *suite)
{
    SRunner *runner = srunner_create(suite);
    int      fine;
    srunner_run_all(runner, CK_ENV);
    fine = srunner_ntests_run(runner) > 0 && srunner_ntests_failed(runner) == 0;
    srunner_free(runner);
    return fine ? EXIT_SUCCESS : EXIT_FAILURE;
}

#endif
