#include "ipc2581/board.h"

#include "base/base.h"

/* The rules' signals as an array, for the jobs to point at. */
typedef struct demand {
    lstub_signal   signal;
    lstub_criteria criteria;
} demand;

static int32_t take_demands(const lstub_rules *rules, demand *demands, int32_t count, lstub_error *err)
{
    int32_t i, status = LSTUB_OK;
    for (i = 0; i < count && status == LSTUB_OK; i++) {
        LSTUB_INIT(demands[i].signal);
        LSTUB_INIT(demands[i].criteria);
        status = lstub_rules_signal(rules, i, NULL, &demands[i].signal, &demands[i].criteria, err);
    }
    return status;
}

/* A hole in error gets its job too: the plan says REFUSED, and numbers stay those of the holes. */
static int32_t fill_jobs(const lstub_board *board, const lstub_rules *rules, const demand *demands, lstub_job *jobs,
                         lstub_error *err)
{
    size_t i;
    for (i = 0; i < board->hole_count; i++) {
        int32_t number = -1, status = lstub_rules_match(rules, board->holes[i].net, &number, err);
        if (status < 0)
            return status;
        LSTUB_INIT(jobs[i]);
        jobs[i].via = &board->holes[i].via;
        if (number >= 0) {
            jobs[i].signal = &demands[number].signal;
            jobs[i].criteria = &demands[number].criteria;
        }
    }
    return LSTUB_OK;
}

int32_t lstub_board_plan(const lstub_board *board, const lstub_rules *rules, const lstub_capability *capability,
                         const lstub_model_options *options, const lstub_allocator *allocator, lstub_plan **out,
                         lstub_error *err)
{
    lstub_allocator alloc;
    lstub_capability from_rules;
    demand *demands;
    lstub_job *jobs;
    int32_t count = lstub_rules_signal_count(rules), status = lstub__allocator(allocator, &alloc, err);
    if (status < 0)
        return status;
    if (board == NULL || (rules == NULL && capability == NULL))
        return lstub__fail(err, LSTUB_E_NULL, board == NULL ? "board" : "capability", -1, "%s = null: must not be null%s",
                           board == NULL ? "board" : "capability", board == NULL ? "" : " without rules");
    if (capability == NULL) {
        LSTUB_INIT(from_rules);
        status = lstub_rules_capability(rules, &from_rules, err);
        capability = &from_rules;
    }
    demands = lstub__new(&alloc, (size_t)count, sizeof *demands, err);
    jobs = lstub__new(&alloc, board->hole_count, sizeof *jobs, err);
    if (demands == NULL || jobs == NULL)
        status = LSTUB_E_MEMORY;
    if (status == LSTUB_OK)
        status = take_demands(rules, demands, count, err);
    if (status == LSTUB_OK)
        status = fill_jobs(board, rules, demands, jobs, err);
    if (status == LSTUB_OK)
        status = lstub_plan_create(board->stackup, jobs, board->hole_count, sizeof *jobs, capability, options, allocator, out, err);
    lstub__free(&alloc, demands);
    lstub__free(&alloc, jobs);
    return status;
}
