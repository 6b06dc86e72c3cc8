/* The words of a rules file; libstub_ipc2581.h has the grammar. */
#include "ipc2581/rules_data.h"

#include "base/base.h"
#include "ipc2581/number.h"
#include "ipc2581/text.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#define WORD_MAX    1023
#define SIGNALS_MAX 1000
#define LENGTH_MAX  0.1   /* m, of anything on a board */

typedef struct parser {
    lstub_rules *rules;
    char        *at;             /* the rest of the line */
    int64_t      line;
    char         item[96];       /* "signal 'x': ", for messages */
    uint32_t     defaults_seen, fab_seen;
    lstub_error *err;
} parser;

static int32_t wrong(const parser *p, const char *field, const char *format, ...) LSTUB_PRINTF(3, 4);

static int32_t wrong(const parser *p, const char *field, const char *format, ...)
{
    char what[256];
    va_list args;
    va_start(args, format);
    vsnprintf(what, sizeof what, format, args);
    va_end(args);
    return lstub__fail(p->err, LSTUB_E_FORMAT, field, p->line, "line %ld: %s%s", (long)p->line, p->item, what);
}

static int is_blank(char c) { return c == ' ' || c == '\t' || c == '\r'; }

/* Next word of the line, or null at its end or at a comment. A # within a word is part of it: RESET#. */
static const char *next_word(parser *p)
{
    char *word;
    while (is_blank(*p->at))
        p->at++;
    if (*p->at == '\0' || *p->at == '#')
        return NULL;
    word = p->at;
    while (*p->at != '\0' && !is_blank(*p->at))
        p->at++;
    if (*p->at != '\0')
        *p->at++ = '\0';
    return word;
}

static int32_t need_word(parser *p, const char *what, const char **word)
{
    *word = next_word(p);
    if (*word == NULL)
        return wrong(p, what, "%s is missing", what);
    if (strlen(*word) > WORD_MAX)
        return wrong(p, what, "%s: longer than %d bytes", what, WORD_MAX);
    return LSTUB_OK;
}

static int32_t line_ends(parser *p)
{
    const char *word = next_word(p);
    return word == NULL ? LSTUB_OK : wrong(p, "rule", "'%.60s': one word too many", word);
}

/* ---- numbers with units -------------------------------------------------------------------------- */

typedef struct unit {
    const char *name;
    double      factor;
} unit;

static const unit length_units[] = {{"m", 1.0}, {"mm", 1e-3}, {"um", 1e-6}, {"mil", 25.4e-6}, {"in", 0.0254}, {NULL, 0}};
static const unit rate_units[] = {{"Bd", 1.0}, {"MBd", 1e6}, {"GBd", 1e9}, {NULL, 0}};
static const unit loss_units[] = {{"dB", 1.0}, {NULL, 0}};

typedef struct key {
    const char  *name;
    const unit  *units;          /* null: a plain number */
    lstub__range range;          /* its unit is the one of the stored value */
    int          whole;          /* a whole number */
    size_t       offset;         /* of the double in the struct it is read into */
} key;

static void unit_names(const unit *units, char *text, size_t bytes)
{
    size_t used = 0;
    for (text[0] = '\0'; units->name != NULL && used < bytes; units++)
        used += (size_t)snprintf(text + used, bytes - used, " %s", units->name);
}

static int32_t read_unit(parser *p, const key *k, const char *number, const char **name, double *factor)
{
    char known[64];
    const unit *u;
    *name = next_word(p);
    for (u = k->units; *name != NULL && u->name != NULL; u++)
        if (strcmp(u->name, *name) == 0) {
            *factor = u->factor;
            return LSTUB_OK;
        }
    unit_names(k->units, known, sizeof known);
    if (*name == NULL)
        return wrong(p, k->name, "%s = %.40s: needs a unit, one of%s", k->name, number, known);
    return wrong(p, k->name, "%s = %.40s %.40s: no such unit, must be one of%s", k->name, number, *name, known);
}

/* The rest of a value whose number has been read as a word. */
static int32_t convert(parser *p, const key *k, const char *word, double *value)
{
    char low[LSTUB__NUMBER_MAX], high[LSTUB__NUMBER_MAX];
    const char *name = "", *space;
    const lstub__range *r = &k->range;
    double number, factor = 1.0;
    int32_t status;
    if (!lstub__parse_double(word, &number))
        return wrong(p, k->name, "%s = '%.40s': must be a number%s", k->name, word,
                     k->units != NULL ? ", a blank and a unit" : "");
    if (k->units != NULL && (status = read_unit(p, k, word, &name, &factor)) < 0)
        return status;
    *value = number * factor;
    if (*value <= r->high && (r->above ? *value > r->low : *value >= r->low) && (!k->whole || floor(*value) == *value))
        return LSTUB_OK;
    space = r->unit[0] != '\0' ? " " : "";
    return wrong(p, k->name, "%s = %.40s%s%s: must be %s%s %s%s%s and <= %s%s%s", k->name, word, space, name,
                 k->whole ? "a whole number " : "", r->above ? ">" : ">=", lstub__significant(low, r->low, 6), space, r->unit,
                 lstub__significant(high, r->high, 6), space, r->unit);
}

static int32_t read_value(parser *p, const key *k, double *value)
{
    const char *word;
    int32_t status = need_word(p, k->name, &word);
    return status < 0 ? status : convert(p, k, word, value);
}

/* The value of the key named `word`, one of `count`, into `target`; each key once. */
static int32_t read_key(parser *p, const char *word, const key *keys, int count, void *target, uint32_t *seen)
{
    int i;
    for (i = 0; i < count; i++)
        if (strcmp(keys[i].name, word) == 0) {
            if (*seen & (UINT32_C(1) << i))
                return wrong(p, word, "%s: given twice", keys[i].name);
            *seen |= UINT32_C(1) << i;
            return read_value(p, &keys[i], (double *)(void *)((char *)target + keys[i].offset));
        }
    return wrong(p, "rule", "'%.60s': unknown word", word);
}

/* ---- rules --------------------------------------------------------------------------------------- */

typedef struct signal_numbers {
    double symbol_rate, levels, notch_over_nyquist, added_loss;
} signal_numbers;

static const key signal_keys[] = {
    {"symbol_rate", rate_units, {1e6, 1e12, 0, "Bd"}, 0, offsetof(signal_numbers, symbol_rate)},
    {"levels", NULL, {2, 64, 0, ""}, 1, offsetof(signal_numbers, levels)},
    {"notch_over_nyquist", NULL, {0, 1e3, 1, ""}, 0, offsetof(signal_numbers, notch_over_nyquist)},
    {"added_loss", loss_units, {0, 100, 1, "dB"}, 0, offsetof(signal_numbers, added_loss)},
};

static const signal_rule *find_signal(const lstub_rules *rules, const char *name)
{
    int32_t i;
    for (i = 0; i < rules->signal_count; i++)
        if (strcmp(rules->signals[i].name, name) == 0)
            return &rules->signals[i];
    return NULL;
}

static int32_t read_signal(parser *p)
{
    signal_numbers numbers = {0, 0, 0, 0};
    const signal_rule *other;
    signal_rule *rule;
    const char *name, *word;
    uint32_t seen = 0;
    int32_t status = need_word(p, "name", &name);
    if (status < 0)
        return status;
    snprintf(p->item, sizeof p->item, "signal '%.40s': ", name);
    if (strcmp(name, "none") == 0)
        return wrong(p, "name", "this name means that a net carries no signal");
    if (p->rules->signal_count == SIGNALS_MAX)
        return wrong(p, "name", "more than %d signals", SIGNALS_MAX);
    other = find_signal(p->rules, name);
    if (other != NULL)
        return wrong(p, "name", "line %ld has a signal of this name", (long)other->line);
    while ((word = next_word(p)) != NULL) {
        status = read_key(p, word, signal_keys, 4, &numbers, &seen);
        if (status < 0)
            return status;
    }
    if (!(numbers.symbol_rate > 0))
        return wrong(p, "symbol_rate", "symbol_rate is missing");
    if (!(numbers.notch_over_nyquist > 0 || numbers.added_loss > 0))
        return wrong(p, "criteria", "needs notch_over_nyquist or added_loss: nothing to judge it by");
    rule = &p->rules->signals[p->rules->signal_count++];
    rule->name = name;
    rule->line = p->line;
    LSTUB_INIT(rule->signal);
    LSTUB_INIT(rule->criteria);
    rule->signal.symbol_rate = numbers.symbol_rate;
    rule->signal.levels = (int32_t)numbers.levels;
    rule->criteria.notch_over_nyquist = numbers.notch_over_nyquist;
    rule->criteria.added_loss_db = numbers.added_loss;
    return LSTUB_OK;
}

static int32_t read_net(parser *p)
{
    net_rule *rule = &p->rules->nets[p->rules->net_count];
    int32_t status = need_word(p, "pattern", &rule->pattern);
    if (status == LSTUB_OK)
        status = need_word(p, "signal", &rule->name);
    rule->line = p->line;
    p->rules->net_count++;
    return status;
}

static int32_t read_pair(parser *p)
{
    pair_rule *rule = &p->rules->pairs[p->rules->pair_count];
    const char *word;
    int i;
    for (i = 0; i < 2; i++) {
        int32_t status = need_word(p, "suffix", &rule->ending[i]);
        if (status < 0)
            return status;
        if (strlen(rule->ending[i]) > LSTUB__SUFFIX_MAX)
            return wrong(p, "suffix", "suffix '%.40s...': longer than %d bytes", rule->ending[i], LSTUB__SUFFIX_MAX);
    }
    if (strcmp(rule->ending[0], rule->ending[1]) == 0)
        return wrong(p, "suffix", "'%s' twice: the two suffixes must differ", rule->ending[0]);
    word = next_word(p);
    if (word != NULL && strcmp(word, "separate") != 0 && strcmp(word, "shared") != 0)
        return wrong(p, "rule", "'%.60s': must be separate or shared", word);
    if (word != NULL)
        rule->kind = strcmp(word, "shared") == 0 ? LSTUB_PAIR_SHARED : LSTUB_PAIR_SEPARATE;
    p->rules->pair_count++;
    return LSTUB_OK;
}

/* PATTERN within|length LENGTH */
static int32_t read_length_rule(parser *p, const char *keyword, length_rule *list, int32_t *count)
{
    key k = {keyword, length_units, {0, LENGTH_MAX, 1, "m"}, 0, 0};
    const char *word = NULL;
    int32_t status = need_word(p, "pattern", &list[*count].pattern);
    if (status == LSTUB_OK)
        status = need_word(p, keyword, &word);
    if (status < 0)
        return status;
    if (strcmp(word, keyword) != 0)
        return wrong(p, "rule", "'%.60s': must be %s", word, keyword);
    status = read_value(p, &k, &list[*count].length);
    ++*count;
    return status;
}

static const key default_keys[] = {
    {"dk", NULL, {1, 1000, 0, ""}, 0, offsetof(lstub__rules_defaults, dk)},
    {"loss_tangent", NULL, {0, 0.5, 0, ""}, 0, offsetof(lstub__rules_defaults, loss_tangent)},
    {"in_plane_ratio", NULL, {0.5, 2, 0, ""}, 0, offsetof(lstub__rules_defaults, in_plane_ratio)},
    {"antipad", length_units, {0, LENGTH_MAX, 1, "m"}, 0, offsetof(lstub__rules_defaults, antipad)},
};

#define FAB_LENGTH(member) {#member, length_units, {0, LENGTH_MAX, 0, "m"}, 0, offsetof(lstub_capability, member)}

static const key fab_keys[] = {
    FAB_LENGTH(depth_tolerance), FAB_LENGTH(cut_clearance), FAB_LENGTH(residual_min), FAB_LENGTH(residual_target),
    FAB_LENGTH(bit_oversize), FAB_LENGTH(wall_clearance),
    {"aspect_ratio", NULL, {0, 1000, 1, ""}, 0, offsetof(lstub_capability, aspect_ratio)},
};

static int32_t read_depths(parser *p)
{
    static const key k = {"depths", length_units, {0, LENGTH_MAX, 1, "m"}, 0, 0};
    lstub_rules *rules = p->rules;
    const char *word;
    size_t room = strlen(p->at) / 4 + 1;   /* "1 m " is the shortest */
    if (rules->depths != NULL)
        return wrong(p, "depths", "depths: given twice");
    rules->depths = lstub__new(&rules->alloc, room, sizeof *rules->depths, p->err);
    if (rules->depths == NULL)
        return LSTUB_E_MEMORY;
    while ((word = next_word(p)) != NULL) {
        int32_t status = convert(p, &k, word, &rules->depths[rules->capability.depth_count]);
        if (status < 0)
            return status;
        rules->capability.depth_count++;
    }
    if (rules->capability.depth_count == 0)
        return wrong(p, "depths", "depths: needs one length or more");
    rules->capability.depths = rules->depths;
    return LSTUB_OK;
}

/* One of the words into *choice; `numbers` says what each stands for. */
static int32_t read_choice(parser *p, const char *name, const char *const *words, const int32_t *numbers, int count,
                           int32_t *choice, uint32_t bit)
{
    const char *word;
    int i;
    int32_t status = need_word(p, name, &word);
    if (status < 0)
        return status;
    if (p->fab_seen & bit)
        return wrong(p, name, "%s: given twice", name);
    p->fab_seen |= bit;
    for (i = 0; i < count; i++)
        if (strcmp(words[i], word) == 0) {
            *choice = numbers[i];
            return LSTUB_OK;
        }
    return wrong(p, name, "%s = '%.60s': must be %s, or %s", name, word, words[0], words[count - 1]);
}

static int32_t read_fab(parser *p)
{
    static const char *const sides[] = {"both", "top", "bottom"}, *const tolerances[] = {"worst", "rss"};
    static const int32_t side_numbers[] = {LSTUB_SIDE_BOTH, LSTUB_SIDE_TOP, LSTUB_SIDE_BOTTOM};
    static const int32_t tolerance_numbers[] = {LSTUB_TOLERANCE_WORST, LSTUB_TOLERANCE_RSS};
    lstub_capability *c = &p->rules->capability;
    const char *word;
    int32_t status = need_word(p, "rule", &word);
    if (status < 0)
        return status;
    if (strcmp(word, "sides") == 0)
        return read_choice(p, "sides", sides, side_numbers, 3, &c->sides, UINT32_C(1) << 30);
    if (strcmp(word, "tolerance") == 0)
        return read_choice(p, "tolerance", tolerances, tolerance_numbers, 2, &c->tolerance_method, UINT32_C(1) << 31);
    if (strcmp(word, "depths") == 0)
        return read_depths(p);
    return read_key(p, word, fab_keys, sizeof fab_keys / sizeof *fab_keys, c, &p->fab_seen);
}

static int32_t read_default(parser *p)
{
    const char *word;
    int32_t status = need_word(p, "rule", &word);
    return status < 0 ? status : read_key(p, word, default_keys, 4, &p->rules->defaults, &p->defaults_seen);
}

static int32_t read_rule(parser *p, const char *word)
{
    lstub_rules *r = p->rules;
    snprintf(p->item, sizeof p->item, "%.40s: ", word);
    if (strcmp(word, "signal") == 0)
        return read_signal(p);
    if (strcmp(word, "net") == 0)
        return read_net(p);
    if (strcmp(word, "pair") == 0)
        return read_pair(p);
    if (strcmp(word, "returns") == 0)
        return read_length_rule(p, "within", r->returns, &r->return_count);
    if (strcmp(word, "pin") == 0)
        return read_length_rule(p, "length", r->pins, &r->pin_count);
    if (strcmp(word, "default") == 0)
        return read_default(p);
    if (strcmp(word, "fab") == 0)
        return read_fab(p);
    p->item[0] = '\0';
    return wrong(p, "rule", "'%.60s': unknown rule, must be signal, net, pair, returns, pin, default or fab", word);
}

/* ---- the file ------------------------------------------------------------------------------------ */

/* Bytes of the UTF-8 character at s, of which n are left; 0: it is none. */
static size_t character(const unsigned char *s, size_t n)
{
    static const struct { unsigned char first, last, low, high, length; } forms[] = {
        {0x01, 0x7F, 0, 0, 1},       {0xC2, 0xDF, 0x80, 0xBF, 2}, {0xE0, 0xE0, 0xA0, 0xBF, 3}, {0xE1, 0xEC, 0x80, 0xBF, 3},
        {0xED, 0xED, 0x80, 0x9F, 3}, {0xEE, 0xEF, 0x80, 0xBF, 3}, {0xF0, 0xF0, 0x90, 0xBF, 4}, {0xF1, 0xF3, 0x80, 0xBF, 4},
        {0xF4, 0xF4, 0x80, 0x8F, 4}};
    size_t i, k;
    for (i = 0; i < sizeof forms / sizeof *forms; i++) {
        if (s[0] < forms[i].first || s[0] > forms[i].last)
            continue;
        if (forms[i].length > n || (forms[i].length > 1 && (s[1] < forms[i].low || s[1] > forms[i].high)))
            return 0;
        for (k = 2; k < forms[i].length; k++)
            if ((s[k] & 0xC0) != 0x80)
                return 0;
        return forms[i].length;
    }
    return 0;
}

static int32_t check_text(parser *p)
{
    const unsigned char *s = (const unsigned char *)p->rules->source;
    size_t i = 0, step;
    for (p->line = 1; i < p->rules->bytes; i += step) {
        step = character(s + i, p->rules->bytes - i);
        if (s[i] == '\n')
            p->line++;
        if (s[i] == '\0')
            return wrong(p, "text", "a zero byte: this is no text");
        if (step == 0)
            return wrong(p, "text", "byte 0x%02X: this is no UTF-8", (unsigned)s[i]);
    }
    return LSTUB_OK;
}

/* Past the mark that some editors put before UTF-8. */
static char *without_mark(char *text) { return strncmp(text, "\xEF\xBB\xBF", 3) == 0 ? text + 3 : text; }

/* Room for as many rules of each kind as lines begin with its first letter or two. */
static int32_t make_room(lstub_rules *r, lstub_error *err)
{
    size_t signals = 0, nets = 0, pairs = 0, returns = 0, pins = 0;
    const char *s;
    for (s = without_mark(r->source); s != NULL; s = strchr(s, '\n')) {
        while (*s == '\n' || is_blank(*s))
            s++;
        signals += *s == 's';
        nets += *s == 'n';
        pairs += s[0] == 'p' && s[1] == 'a';
        returns += *s == 'r';
        pins += s[0] == 'p' && s[1] == 'i';
    }
    r->signals = lstub__new(&r->alloc, signals, sizeof *r->signals, err);
    r->nets = lstub__new(&r->alloc, nets, sizeof *r->nets, err);
    r->pairs = lstub__new(&r->alloc, pairs, sizeof *r->pairs, err);
    r->returns = lstub__new(&r->alloc, returns, sizeof *r->returns, err);
    r->pins = lstub__new(&r->alloc, pins, sizeof *r->pins, err);
    return r->signals == NULL || r->nets == NULL || r->pairs == NULL || r->returns == NULL || r->pins == NULL
               ? LSTUB_E_MEMORY
               : LSTUB_OK;
}

static int32_t read_lines(parser *p)
{
    char *next = without_mark(p->rules->words);
    for (p->line = 1; next != NULL; p->line++) {
        const char *word;
        int32_t status = LSTUB_OK;
        p->at = next;
        next = strchr(next, '\n');
        if (next != NULL)
            *next++ = '\0';
        word = next_word(p);
        if (word != NULL)
            status = read_rule(p, word);
        if (word != NULL && status == LSTUB_OK)
            status = line_ends(p);
        if (status < 0)
            return status;
    }
    return LSTUB_OK;
}

/* After all lines, so that a net may stand above its signal. */
static int32_t resolve_nets(parser *p)
{
    int32_t i;
    for (i = 0; i < p->rules->net_count; i++) {
        net_rule *rule = &p->rules->nets[i];
        const signal_rule *signal = find_signal(p->rules, rule->name);
        rule->signal = signal == NULL ? -1 : (int32_t)(signal - p->rules->signals);
        if (signal == NULL && strcmp(rule->name, "none") != 0) {
            p->line = rule->line;
            snprintf(p->item, sizeof p->item, "net '%.40s': ", rule->pattern);
            return wrong(p, "signal", "'%.60s': no rule has a signal of this name", rule->name);
        }
    }
    return LSTUB_OK;
}

int32_t lstub__rules_read(lstub_rules *rules, lstub_error *err)
{
    parser p = {0};
    int32_t status;
    p.rules = rules;
    p.err = err;
    rules->defaults = *lstub__rules_defaults_of(NULL);
    LSTUB_INIT(rules->capability);
    status = check_text(&p);
    if (status == LSTUB_OK)
        status = make_room(rules, err);
    if (status == LSTUB_OK)
        status = read_lines(&p);
    return status < 0 ? status : resolve_nets(&p);
}
