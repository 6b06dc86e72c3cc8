/* A plan inside: jobs that are alike share a case, computed once. */
#ifndef LSTUB_PLAN_H
#define LSTUB_PLAN_H

#include "criteria/criteria.h"

typedef struct lstub__capability {
    lstub_capability in;
    double *depths;                /* sorted copy, or null: any depth                          */
} lstub__capability;

/* Where the tip of a drill may lie on one side of a via, tolerances used up. Lengths in m. */
typedef struct lstub__room {
    int32_t reason;                /* LSTUB_REASON_FAILS: may be drilled; else why it cannot be */
    int32_t layer;                 /* that the reason speaks of, -1                            */
    double  value, limit;          /* the two numbers compared                                 */
    double  full;                  /* surface to the face of the must-not-cut layer            */
    double  shrink, grow;          /* how much shorter or longer the residual may come out     */
    double  low, high;             /* residual, nominal                                        */
    double  depth_least, depth_most;  /* the same from the surface; set by lstub__room_limit   */
} lstub__room;

/* What the fabricator and the geometry leave, before the criteria: sets all but `high`, which is `full`. */
void lstub__room_make(lstub__room *room, const lstub__site *site, int arm, const lstub__capability *capability);
/* Narrows the room to residuals that stay within `longest`; sets the reason where nothing is left. */
void lstub__room_limit(lstub__room *room, double longest, const lstub__capability *capability);

typedef struct lstub__case {
    lstub_decision decision;       /* complete but for depths and groups until these are shared out */
    double  notch_ratio, loss_db;  /* of the criteria, for the words                            */
    double  aim[2];                /* depth wanted on each side, m                              */
    int64_t jobs;
    int64_t message;               /* number of its error message, -1                           */
} lstub__case;

/* What the model says of vias that differ at most in the copper beside the hole and in their pin: found when first asked for. */
typedef struct lstub__circuit {
    int      judged, limited[2], halved, settled;      /* what is known                                   */
    int32_t  judged_status, count;
    lstub_margin before;
    double   limit[2];             /* longest stub on each side, the other as it is                       */
    double   least[2], part;       /* both sides: shortest residuals, what part of the rest may stay; < 0: fails */
    double   after_length[2];
    int32_t  after_status;
    lstub_margin after;
} lstub__circuit;

/* Decides one via on its own; the depths are intervals still. A status < 0: the via is refused, for the reason in err. */
int32_t lstub__decide(lstub__case *out, lstub__circuit *circuit, const lstub_stackup *stackup, const lstub_job *job,
                      const lstub__capability *capability, const lstub_model_options *options, lstub_error *err);
/* With the depths settled: residuals and what the via is like after drilling. */
int32_t lstub__settle(lstub__case *out, lstub__circuit *circuit, const lstub_stackup *stackup, const lstub_job *job,
                      const lstub__capability *capability, const lstub_model_options *options, lstub_error *err);

/* One interval to be stabbed; `point` comes back. */
typedef struct lstub__interval {
    double low, high, aim, weight, point;
    size_t owner;
} lstub__interval;

/* Fewest points that lie in all intervals: sorts them, sets their points, returns how many different ones. */
int32_t lstub__stab(lstub__interval *intervals, size_t count, const lstub__capability *capability);

typedef struct lstub__name { char text[LSTUB_NAME_MAX + 1]; } lstub__name;

struct lstub_plan {
    lstub_allocator alloc;
    lstub_plan_summary summary;
    size_t   job_count, case_count;
    uint32_t *case_of;             /* [job_count]                                               */
    lstub__case *cases;
    lstub_drill_group *groups;
    lstub_error *messages;
    lstub__name *layers;           /* names, for the words                                      */
    int32_t  layer_count;
};

#endif
