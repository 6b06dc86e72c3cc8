/* Reads tests/data/networks.csv; tests/tools/make_network_table.py says what is in it. */
#ifndef CHECK_NETWORK_H
#define CHECK_NETWORK_H

#include "check_util.h"

#define SOURCE     "scikit-rf and NumPy: tests/data/networks.csv"
#define CASES_MAX  400
#define POOL       60000

typedef struct lines {         /* one case: its keys with their numbers */
    char   function[24];
    int32_t p;
    int    count;
    struct {
        char    key[12];
        double *value;
        size_t  n;
    } line[8];
} lines;

static lines  cases[CASES_MAX];
static size_t case_count, used;
static double pool[POOL];

static inline void need(int fine, const char *what)
{
    if (!fine) {
        fprintf(stderr, "networks.csv: cannot read '%.60s'\n", what);
        exit(EXIT_FAILURE);
    }
}

static inline void read_line(lines *c, const char *text)
{
    const char *at = strchr(text, ',');
    int k = c->count++;
    need(at != NULL && k < 8 && (size_t)(at - text) < sizeof c->line[k].key, text);
    memcpy(c->line[k].key, text, (size_t)(at - text));
    c->line[k].value = pool + used;
    while (*at == ',') {
        char *end;
        need(used < POOL, "so many numbers");
        pool[used++] = strtod(at + 1, &end);
        need(end != at + 1, text);
        at = end;
        c->line[k].n++;
    }
}

static inline void read_table(void)
{
    static char text[20000];
    FILE *file = fopen(LSTUB_TEST_DATA "/networks.csv", "r");
    need(file != NULL, "the file");
    while (fgets(text, sizeof text, file) != NULL) {
        if (text[0] == '#')
            continue;
        if (strncmp(text, "case,", 5) == 0) {
            lines *c = &cases[case_count];
            need(++case_count < CASES_MAX && sscanf(text, "case,%23[^,],%d", c->function, &c->p) == 2, text);
            continue;
        }
        need(case_count > 0, text);
        read_line(&cases[case_count - 1], text);
    }
    fclose(file);
    need(case_count > 100, "enough cases");
}

static inline double *get(const lines *c, const char *key, size_t n)
{
    for (int k = 0; k < c->count; k++)
        if (strcmp(c->line[k].key, key) == 0) {
            ck_assert_msg(n == 0 || c->line[k].n == n, "%s: %zu numbers for %s", c->function, c->line[k].n, key);
            return c->line[k].value;
        }
    ck_abort_msg("%s: no %s", c->function, key);
    return NULL;
}

#endif
