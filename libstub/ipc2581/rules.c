#include "ipc2581/rules_data.h"

#include "base/base.h"
#include "ipc2581/number.h"

#include <errno.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#define FILE_MAX 1048576u   /* bytes of a rules file */

/* One character of UTF-8 on. */
static const char *next_character(const char *p)
{
    p++;
    while (((unsigned char)*p & 0xC0) == 0x80)
        p++;
    return p;
}

int lstub__glob(const char *pattern, const char *text)
{
    const char *star = NULL, *resume = NULL;   /* the last * and where the text after it was tried */
    while (*text != '\0') {
        if (*pattern == '*') {
            star = ++pattern;
            resume = text;
        } else if (*pattern == '?') {
            pattern++;
            text = next_character(text);
        } else if (*pattern == *text) {
            pattern++;
            text++;
        } else if (star != NULL) {
            pattern = star;
            text = resume = next_character(resume);
        } else {
            return 0;
        }
    }
    while (*pattern == '*')
        pattern++;
    return *pattern == '\0';
}

static int ends_with(const char *text, const char *ending, size_t *stem)
{
    size_t length = strlen(text), tail = strlen(ending);
    if (length < tail || strcmp(text + length - tail, ending) != 0)
        return 0;
    *stem = length - tail;
    return 1;
}

int lstub__rules_pair(const lstub_rules *rules, const char *net, char *partner, size_t bytes, int32_t *kind)
{
    int32_t i;
    int end;
    size_t stem;
    for (i = 0; rules != NULL && *net != '\0' && i < rules->pair_count; i++)
        for (end = 0; end < 2; end++) {
            const char *other = rules->pairs[i].ending[1 - end];
            if (!ends_with(net, rules->pairs[i].ending[end], &stem))
                continue;
            if (stem + strlen(other) >= bytes)
                return 0;
            memcpy(partner, net, stem);
            strcpy(partner + stem, other);
            *kind = rules->pairs[i].kind;
            return 1;
        }
    return 0;
}

static const length_rule *first_match(const length_rule *list, int32_t count, const char *name)
{
    int32_t i;
    for (i = 0; i < count; i++)
        if (lstub__glob(list[i].pattern, name))
            return &list[i];
    return NULL;
}

int lstub__rules_return(const lstub_rules *rules, const char *net, double *within)
{
    const length_rule *rule;
    if (rules == NULL || *net == '\0' || (rule = first_match(rules->returns, rules->return_count, net)) == NULL)
        return 0;
    *within = rule->length;
    return 1;
}

double lstub__rules_pin(const lstub_rules *rules, const char *padstack)
{
    const length_rule *rule;
    if (rules == NULL || *padstack == '\0' || (rule = first_match(rules->pins, rules->pin_count, padstack)) == NULL)
        return 0.0;
    return rule->length;
}

const lstub__rules_defaults *lstub__rules_defaults_of(const lstub_rules *rules)
{
    static const lstub__rules_defaults none = {NAN, NAN, NAN, NAN};
    return rules != NULL ? &rules->defaults : &none;
}

int32_t lstub_rules_parse(const char *text, size_t bytes, const lstub_allocator *allocator, lstub_rules **out,
                          lstub_error *err)
{
    lstub_allocator alloc;
    lstub_rules *rules;
    int32_t status = lstub__allocator(allocator, &alloc, err);
    if (status < 0)
        return status;
    if (text == NULL || out == NULL)
        return lstub__fail(err, LSTUB_E_NULL, text == NULL ? "text" : "out", -1, "%s = null: must not be null",
                           text == NULL ? "text" : "out");
    if (bytes > FILE_MAX)
        return lstub__fail(err, LSTUB_E_FORMAT, "bytes", -1, "rules of more than %u bytes: too large", FILE_MAX);
    rules = lstub__new(&alloc, 1, sizeof *rules, err);
    if (rules == NULL)
        return LSTUB_E_MEMORY;
    rules->alloc = alloc;
    rules->bytes = bytes;
    rules->source = lstub__new(&alloc, bytes + 1, 1, err);
    rules->words = lstub__new(&alloc, bytes + 1, 1, err);
    status = rules->source == NULL || rules->words == NULL ? LSTUB_E_MEMORY : LSTUB_OK;
    if (status == LSTUB_OK) {
        memcpy(rules->source, text, bytes);
        memcpy(rules->words, text, bytes);
        status = lstub__rules_read(rules, err);
    }
    if (status < 0)
        lstub_rules_destroy(rules);
    else
        *out = rules;
    return status;
}

int32_t lstub__rules_copy(const lstub_rules *rules, const lstub_allocator *allocator, lstub_rules **out, lstub_error *err)
{
    *out = NULL;
    return rules == NULL ? LSTUB_OK : lstub_rules_parse(rules->source, rules->bytes, allocator, out, err);
}

static int32_t cannot_read(const char *path, int error, lstub_error *err)
{
    return lstub__fail(err, LSTUB_E_READ, "path", -1, "cannot read '%s': %s", lstub__path_tail(path), strerror(error));
}

int32_t lstub_rules_load(const char *path, const lstub_allocator *allocator, lstub_rules **out, lstub_error *err)
{
    lstub_allocator alloc;
    FILE *file;
    char *text;
    size_t bytes;
    int error;
    int32_t status = lstub__allocator(allocator, &alloc, err);
    if (status < 0)
        return status;
    if (path == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "path", -1, "path = null: must name a file");
    text = lstub__new(&alloc, FILE_MAX + 1, 1, err);
    if (text == NULL)
        return LSTUB_E_MEMORY;
    file = fopen(path, "rb");
    if (file == NULL) {
        status = cannot_read(path, errno, err);
        lstub__free(&alloc, text);
        return status;
    }
    bytes = fread(text, 1, FILE_MAX + 1, file);
    error = ferror(file) ? errno : 0;
    fclose(file);
    status = error != 0 ? cannot_read(path, error, err) : lstub_rules_parse(text, bytes, &alloc, out, err);
    lstub__free(&alloc, text);
    return status;
}

void lstub_rules_destroy(lstub_rules *rules)
{
    if (rules == NULL)
        return;
    lstub_allocator alloc = rules->alloc;
    lstub__free(&alloc, rules->source);
    lstub__free(&alloc, rules->words);
    lstub__free(&alloc, rules->signals);
    lstub__free(&alloc, rules->nets);
    lstub__free(&alloc, rules->pairs);
    lstub__free(&alloc, rules->returns);
    lstub__free(&alloc, rules->pins);
    lstub__free(&alloc, rules->depths);
    lstub__free(&alloc, rules);
}

int32_t lstub_rules_signal_count(const lstub_rules *rules) { return rules == NULL ? 0 : rules->signal_count; }

static int32_t no_rules(lstub_error *err)
{
    return lstub__fail(err, LSTUB_E_NULL, "rules", -1, "rules = null: must not be null");
}

int32_t lstub_rules_signal(const lstub_rules *rules, int32_t index, const char **name, lstub_signal *signal,
                           lstub_criteria *criteria, lstub_error *err)
{
    const signal_rule *rule;
    int32_t status = LSTUB_OK;
    if (rules == NULL)
        return no_rules(err);
    if (index < 0 || index >= rules->signal_count)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "index", index, "index = %ld: must be >= 0 and < %ld signals", (long)index,
                           (long)rules->signal_count);
    rule = &rules->signals[index];
    if (signal != NULL)
        status = lstub__give(&rule->signal, sizeof rule->signal, signal, sizeof *signal, "signal", err);
    if (status == LSTUB_OK && criteria != NULL)
        status = lstub__give(&rule->criteria, sizeof rule->criteria, criteria, sizeof *criteria, "criteria", err);
    if (status == LSTUB_OK && name != NULL)
        *name = rule->name;
    return status;
}

int32_t lstub_rules_match(const lstub_rules *rules, const char *net, int32_t *signal, lstub_error *err)
{
    int32_t i;
    if (net == NULL || signal == NULL)
        return lstub__fail(err, LSTUB_E_NULL, net == NULL ? "net" : "signal", -1, "%s = null: must not be null",
                           net == NULL ? "net" : "signal");
    *signal = -1;   /* so it stays for a hole without a net, and without rules */
    for (i = 0; rules != NULL && *net != '\0' && i < rules->net_count; i++)
        if (lstub__glob(rules->nets[i].pattern, net)) {
            *signal = rules->nets[i].signal;
            break;
        }
    return LSTUB_OK;
}

int32_t lstub_rules_capability(const lstub_rules *rules, lstub_capability *out, lstub_error *err)
{
    if (rules == NULL)
        return no_rules(err);
    return lstub__give(&rules->capability, sizeof rules->capability, out, sizeof *out, "out", err);
}
