/* Handles shared by threads without a lock: each thread gets the answers that one alone gets. Under -fsanitize=thread any
** hidden state would be reported as well. */
#include "check_board.h"

#include <pthread.h>

enum { THREADS = 8, ROUNDS = 20, VIAS = 40 };

typedef struct shared {
    test_board       board;
    lstub_model     *model;
    lstub_plan      *plan;
    lstub_capability capability;
    int32_t          connects[VIAS][2];
    lstub_via        via[VIAS];
    lstub_signal     signal;
    lstub_criteria   criteria;
    lstub_job        job[VIAS];
} shared;

typedef struct answers {
    double         f1[VIAS], zin[2], rate;
    lstub_decision decision[VIAS];
    lstub_margin   margin;
    char           reason[LSTUB_REASON_MAX];
    int32_t        failed;
} answers;

static shared  all;
static answers alone, result[THREADS];

/* Everything that reads the shared handles, and a plan made anew from the shared stackup. */
static void ask(answers *a)
{
    double f = 2e10;
    lstub_plan *own = NULL;
    lstub_error err;
    memset(a, 0, sizeof *a);
    LSTUB_INIT(err);
    LSTUB_INIT(a->margin);
    a->failed |= lstub_first_notch_batch(all.board.stackup, all.via, VIAS, sizeof all.via[0], LOADED, a->f1, NULL, NULL, NULL, &err) < 0;
    a->failed |= lstub_model_zin(all.model, LSTUB_ALL_STUBS, &f, 1, a->zin, NULL, &err) < 0;
    a->failed |= lstub_model_margin(all.model, &all.signal, &all.criteria, &a->margin, &err) < 0;
    a->failed |= lstub_highest_symbol_rate(all.model, &all.criteria, &a->rate, NULL, &err) < 0;
    a->failed |= lstub_plan_create(all.board.stackup, all.job, VIAS, sizeof all.job[0], &all.capability, LOADED, NULL, &own, &err) < 0;
    for (size_t i = 0; i < VIAS; i++) {
        LSTUB_INIT(a->decision[i]);
        a->failed |= lstub_plan_decision(i % 2 ? own : all.plan, i, &a->decision[i], &err) < 0;
    }
    a->failed |= lstub_plan_reason(all.plan, 3, a->reason, sizeof a->reason, &err) < 0;
    lstub_plan_destroy(own);
}

static void *run(void *out)
{
    for (int i = 0; i < ROUNDS; i++)
        ask(out);
    return NULL;
}

static void make_shared(void)
{
    lstub_error err;
    LSTUB_INIT(err);
    board_make(&all.board, "SPSPSPSPS", 0.2e-3, 35e-6);
    LSTUB_INIT(all.signal);
    all.signal.symbol_rate = 25e9;
    LSTUB_INIT(all.criteria);
    all.criteria.notch_over_nyquist = 2;
    LSTUB_INIT(all.capability);
    all.capability.depth_tolerance = 50e-6;
    for (uint64_t i = 0; i < VIAS; i++) {
        all.connects[i][1] = copper(1 + (int)(7 * test_random(1, i)));
        all.via[i] = board_via(all.connects[i], 2);
        all.via[i].drill += 1e-6 * (double)i;
        LSTUB_INIT(all.job[i]);
        all.job[i].via = &all.via[i];
        all.job[i].signal = &all.signal;
        all.job[i].criteria = &all.criteria;
    }
    assert_ok(lstub_model_create(all.board.stackup, &all.via[0], NULL, NULL, &all.model, &err), err);
    assert_ok(lstub_plan_create(all.board.stackup, all.job, VIAS, sizeof all.job[0], &all.capability, LOADED, NULL, &all.plan, &err), err);
}

START_TEST(threads_get_what_one_gets)
{
    pthread_t thread[THREADS];
    make_shared();
    ask(&alone);
    ck_assert_int_eq(alone.failed, 0);
    for (int i = 0; i < THREADS; i++)
        ck_assert_int_eq(pthread_create(&thread[i], NULL, run, &result[i]), 0);
    for (int i = 0; i < THREADS; i++)
        pthread_join(thread[i], NULL);
    for (int i = 0; i < THREADS; i++)
        ck_assert_mem_eq(&result[i], &alone, sizeof alone);
    lstub_plan_destroy(all.plan);
    lstub_model_destroy(all.model);
    lstub_stackup_destroy(all.board.stackup);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("threads");
    TCase *one = tcase_create("threads");
    tcase_set_timeout(one, 120);
    tcase_add_test(one, threads_get_what_one_gets);
    suite_add_tcase(suite, one);
    return test_main(suite);
}
