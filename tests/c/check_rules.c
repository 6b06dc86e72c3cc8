/* The rules file: what it says, what it refuses and on which line, and what the board reader asks of it. */
#include "check_util.h"

#include "ipc2581/rules.h"
#include "libstub_ipc2581.h"

static lstub_error err;

static lstub_rules *parse(const char *text)
{
    lstub_rules *rules = NULL;
    LSTUB_INIT(err);
    assert_ok(lstub_rules_parse(text, strlen(text), NULL, &rules, &err), err);
    return rules;
}

static const char *const good =
    "# two links and a fabricator\n"
    "signal fast symbol_rate 53.125 GBd levels 4 notch_over_nyquist 2 added_loss 0.3 dB\r\n"
    "  signal\tslow added_loss 0.5 dB symbol_rate 2500 MBd   # levels: two\n"
    "\n"
    "net TX?_SLOW slow\n"
    "net TX_OFF* none\n"
    "net TX* fast\n"
    "net RESET# slow # the first is part of the name\n"
    "pair _P _N shared\n"
    "pair + - \n"
    "returns GND* within 1.5 mm\n"
    "returns VSS within 40 mil\n"
    "pin PRESS* length 1.0 mm\n"
    "default dk 3.7\n"
    "default antipad 0.03 in\n"
    "fab depth_tolerance 50 um\n"
    "fab cut_clearance 0.1 mm\n"
    "fab aspect_ratio 12\n"
    "fab sides bottom\n"
    "fab tolerance rss\n"
    "fab depths 0.5 mm 1 mm 0.06 in";

START_TEST(signals_as_written)
{
    lstub_rules *rules = parse(good);
    lstub_signal signal;
    lstub_criteria criteria;
    const char *name = NULL;
    LSTUB_INIT(signal);
    LSTUB_INIT(criteria);
    ck_assert_int_eq(lstub_rules_signal_count(rules), 2);
    assert_ok(lstub_rules_signal(rules, 0, &name, &signal, &criteria, &err), err);
    ck_assert_str_eq(name, "fast");
    ck_assert(signal.symbol_rate == 53.125e9 && signal.levels == 4);
    ck_assert(criteria.notch_over_nyquist == 2.0 && criteria.added_loss_db == 0.3);
    assert_ok(lstub_rules_signal(rules, 1, &name, &signal, &criteria, &err), err);
    ck_assert_str_eq(name, "slow");
    ck_assert(signal.symbol_rate == 2.5e9 && signal.levels == 0);
    ck_assert(criteria.notch_over_nyquist == 0.0 && criteria.added_loss_db == 0.5);
    assert_ok(lstub_rules_signal(rules, 1, NULL, NULL, NULL, &err), err);
    assert_refused(lstub_rules_signal(rules, 2, &name, NULL, NULL, &err), LSTUB_E_ARGUMENT, err, "index = 2|< 2");
    assert_refused(lstub_rules_signal(rules, -1, &name, NULL, NULL, &err), LSTUB_E_ARGUMENT, err, "index = -1");
    assert_refused(lstub_rules_signal(NULL, 0, &name, NULL, NULL, &err), LSTUB_E_NULL, err, "rules");
    lstub_rules_destroy(rules);
}
END_TEST

static int32_t match(const lstub_rules *rules, const char *net)
{
    int32_t signal = -9;
    assert_ok(lstub_rules_match(rules, net, &signal, &err), err);
    return signal;
}

START_TEST(first_match_wins)
{
    lstub_rules *rules = parse(good);
    ck_assert_int_eq(match(rules, "TX1_SLOW"), 1);
    ck_assert_int_eq(match(rules, "TX12_SLOW"), 0);
    ck_assert_int_eq(match(rules, "TX_OFF3"), -1);
    ck_assert_int_eq(match(rules, "TX"), 0);
    ck_assert_int_eq(match(rules, "tx"), -1);
    ck_assert_int_eq(match(rules, "RESET#"), 1);
    ck_assert_int_eq(match(rules, ""), -1);
    ck_assert_int_eq(match(NULL, "TX"), -1);
    lstub_rules_destroy(rules);
    rules = parse("signal a symbol_rate 1 GBd added_loss 1 dB\nnet * a");
    ck_assert_int_eq(match(rules, "X"), 0);
    ck_assert_int_eq(match(rules, ""), -1);   /* a hole without a net carries nothing */
    lstub_rules_destroy(rules);
    assert_refused(lstub_rules_match(NULL, NULL, NULL, &err), LSTUB_E_NULL, err, "net");
}
END_TEST

START_TEST(patterns)
{
    static const struct { const char *pattern, *text; int fits; } rows[] = {
        {"", "", 1}, {"", "a", 0}, {"a", "", 0}, {"*", "", 1}, {"**", "abc", 1}, {"?", "", 0}, {"?", "a", 1},
        {"?", "ab", 0}, {"a*c", "abc", 1}, {"a*c", "ac", 1}, {"a*c", "acb", 0}, {"*a*b*", "xxaxxbxx", 1},
        {"*a*b*", "xxbxxaxx", 0}, {"*ab", "aab", 1}, {"*aab", "aaab", 1}, {"a?c*", "abcd", 1}, {"A", "a", 0},
        {"?", "\xC3\xA9", 1}, {"??", "\xC3\xA9", 0}, {"*\xA9", "\xC3\xA9", 0}, {"[ab]", "a", 0}, {"[ab]", "[ab]", 1},
        {"a\\*", "a*", 0}, {"a\\*", "a\\b", 1},
    };
    char many[4001], stars[201];
    for (size_t i = 0; i < COUNT(rows); i++)
        ck_assert_msg(lstub__glob(rows[i].pattern, rows[i].text) == rows[i].fits, "'%s' on '%s'", rows[i].pattern,
                      rows[i].text);
    memset(many, 'a', 4000);   /* would take for ever by trying everything */
    many[4000] = '\0';
    for (int i = 0; i < 100; i++)
        memcpy(stars + 2 * i, "*a", 2);
    memcpy(stars + 198, "*b", 3);
    ck_assert(!lstub__glob(stars, many));
}
END_TEST

START_TEST(what_the_reader_asks)
{
    lstub_rules *rules = parse(good);
    char partner[32] = "";
    double within = 0.0;
    int32_t kind = -1;
    ck_assert(lstub__rules_pair(rules, "RX_P", partner, sizeof partner, &kind));
    ck_assert_str_eq(partner, "RX_N");
    ck_assert_int_eq(kind, LSTUB_PAIR_SHARED);
    ck_assert(lstub__rules_pair(rules, "RX_N", partner, sizeof partner, &kind));
    ck_assert_str_eq(partner, "RX_P");
    ck_assert(lstub__rules_pair(rules, "D-", partner, sizeof partner, &kind));
    ck_assert_str_eq(partner, "D+");
    ck_assert_int_eq(kind, 0);
    ck_assert(!lstub__rules_pair(rules, "RX", partner, sizeof partner, &kind));
    ck_assert(!lstub__rules_pair(rules, "", partner, sizeof partner, &kind));
    ck_assert(!lstub__rules_pair(rules, "RX_P", partner, 4, &kind));   /* "RX_N" needs five bytes */
    ck_assert(lstub__rules_pair(rules, "RX_P", partner, 5, &kind));
    ck_assert(!lstub__rules_pair(NULL, "RX_P", partner, sizeof partner, &kind));
    ck_assert(lstub__rules_return(rules, "GND1", &within));
    assert_close(within, 1.5e-3, 1e-15, 0.0, "the rule");
    ck_assert(lstub__rules_return(rules, "VSS", &within));
    assert_close(within, 1.016e-3, 1e-15, 0.0, "40 x 25.4 um");
    ck_assert(!lstub__rules_return(rules, "VDD", &within));
    ck_assert(!lstub__rules_return(NULL, "GND1", &within));
    assert_close(lstub__rules_pin(rules, "PRESS9"), 1e-3, 1e-15, 0.0, "the rule");
    ck_assert(lstub__rules_pin(rules, "VIA10") == 0.0 && lstub__rules_pin(NULL, "PRESS9") == 0.0);
    ck_assert(lstub__rules_defaults_of(rules)->dk == 3.7);
    ck_assert(isnan(lstub__rules_defaults_of(rules)->loss_tangent) && isnan(lstub__rules_defaults_of(NULL)->dk));
    assert_close(lstub__rules_defaults_of(rules)->antipad, 0.762e-3, 1e-15, 0.0, "0.03 in");
    lstub_rules_destroy(rules);
}
END_TEST

static void capability_as_written(const lstub_rules *rules)
{
    lstub_capability c;
    LSTUB_INIT(c);
    assert_ok(lstub_rules_capability(rules, &c, &err), err);
    assert_close(c.depth_tolerance, 50e-6, 1e-15, 0.0, "the rule");
    assert_close(c.cut_clearance, 0.1e-3, 1e-15, 0.0, "the rule");
    ck_assert(c.residual_min == 0.0 && c.residual_target == 0.0 && c.bit_oversize == 0.0 && c.wall_clearance == 0.0);
    ck_assert(c.aspect_ratio == 12.0);
    ck_assert_int_eq(c.sides, LSTUB_SIDE_BOTTOM);
    ck_assert_int_eq(c.tolerance_method, LSTUB_TOLERANCE_RSS);
    ck_assert_uint_eq(c.depth_count, 3);
    assert_close(c.depths[0], 0.5e-3, 1e-15, 0.0, "the rule");
    assert_close(c.depths[2], 1.524e-3, 1e-15, 0.0, "0.06 in");
}

START_TEST(capability_and_copy)
{
    lstub_rules *rules = parse(good), *copy = NULL;
    capability_as_written(rules);
    assert_ok(lstub__rules_copy(rules, NULL, &copy, &err), err);
    lstub_rules_destroy(rules);
    capability_as_written(copy);
    ck_assert_int_eq(match(copy, "TX"), 0);
    lstub_rules_destroy(copy);
    assert_ok(lstub__rules_copy(NULL, NULL, &copy, &err), err);
    ck_assert_ptr_null(copy);
    rules = parse("");
    ck_assert_int_eq(lstub_rules_signal_count(rules), 0);
    ck_assert_int_eq(lstub_rules_signal_count(NULL), 0);
    lstub_rules_destroy(rules);
    lstub_rules_destroy(NULL);
}
END_TEST

#define SIGNAL "signal x symbol_rate 1 GBd added_loss 1 dB\n"
#define DEPTH "fab depths 1 mm\n"

static const struct { const char *text; int line; const char *words; } bad[] = {
    {"\n\nsginal x", 3, "line 3|'sginal'|unknown rule"},
    {"signal", 1, "line 1|name is missing"},
    {"signal x", 1, "signal 'x'|symbol_rate is missing"},
    {"signal x symbol_rate", 1, "symbol_rate is missing"},
    {"signal x symbol_rate -3 GBd added_loss 1 dB", 1, "line 1: signal 'x': symbol_rate = -3 GBd: must be|Bd"},
    {"signal x symbol_rate 0 Bd added_loss 1 dB", 1, "symbol_rate = 0 Bd: must be >= 1e+06 Bd and <= 1e+12 Bd"},
    {"signal x symbol_rate 1e400 Bd added_loss 1 dB", 1, "symbol_rate = '1e400': must be a number"},
    {"signal x symbol_rate nan Bd added_loss 1 dB", 1, "symbol_rate = 'nan': must be a number"},
    {"signal x symbol_rate 3 added_loss 1 dB", 1, "symbol_rate = 3 added_loss: no such unit|Bd MBd GBd"},
    {"signal x added_loss 1 dB symbol_rate 3", 1, "symbol_rate = 3: needs a unit|Bd MBd GBd"},
    {"signal x symbol_rate 3GBd added_loss 1 dB", 1, "symbol_rate = '3GBd': must be a number, a blank and a unit"},
    {"signal x symbol_rate 3 Gb added_loss 1 dB", 1, "symbol_rate = 3 Gb: no such unit"},
    {"signal x symbol_rate 3 GBd", 1, "notch_over_nyquist or added_loss"},
    {"signal x symbol_rate 3 GBd added_loss 0 dB", 1, "added_loss = 0 dB: must be > 0 dB"},
    {"signal x symbol_rate 3 GBd notch_over_nyquist -1", 1, "notch_over_nyquist = -1: must be > 0"},
    {"signal x symbol_rate 3 GBd levels 2.5 added_loss 1 dB", 1, "levels = 2.5: must be a whole number >= 2 and <= 64"},
    {"signal x symbol_rate 3 GBd levels 1 added_loss 1 dB", 1, "levels = 1: must be a whole number >= 2"},
    {"signal x symbol_rate 3 GBd symbol_rate 4 GBd", 1, "symbol_rate: given twice"},
    {"signal x symbol_rate 3 GBd colour 4", 1, "signal 'x'|'colour': unknown word"},
    {SIGNAL "# \n" SIGNAL, 3, "signal 'x'|line 1 has a signal of this name"},
    {"signal none symbol_rate 1 GBd added_loss 1 dB\n", 1, "'none'"},
    {"net", 1, "net|pattern is missing"},
    {"net A", 1, "signal is missing"},
    {SIGNAL "net A x\nnet B y\nnet C z", 3, "line 3: net 'B'|'y'"},
    {SIGNAL "net A x y", 2, "'y': one word too many"},
    {"pair _P", 1, "suffix is missing"},
    {"pair _P _P", 1, "must differ"},
    {"pair _P _N joined", 1, "'joined': must be separate or shared"},
    {"returns GND", 1, "within is missing"},
    {"returns GND near 1 mm", 1, "'near': must be within"},
    {"returns GND within 0 mm", 1, "within = 0 mm: must be > 0 m and <= 0.1 m"},
    {"returns GND within 101 mm", 1, "within = 101 mm: must be > 0 m and <= 0.1 m"},
    {"pin P length 1", 1, "length = 1: needs a unit|m mm um mil in"},
    {"pin P length 1 inch", 1, "length = 1 inch: no such unit"},
    {"default", 1, "rule is missing"},
    {"default dk 0.9", 1, "default: dk = 0.9: must be >= 1 and <= 1000"},
    {"default dk 4\ndefault dk 4", 2, "dk: given twice"},
    {"default loss_tangent -0.01", 1, "loss_tangent = -0.01: must be >= 0 and <= 0.5"},
    {"default in_plane_ratio 3", 1, "in_plane_ratio = 3: must be >= 0.5 and <= 2"},
    {"default antipad 30 mil x", 1, "'x': one word too many"},
    {"default colour 1", 1, "'colour': unknown word"},
    {"fab depth_tolerance -1 um", 1, "fab: depth_tolerance = -1 um: must be >= 0 m"},
    {"fab aspect_ratio 0", 1, "aspect_ratio = 0: must be > 0"},
    {"fab sides left", 1, "sides = 'left': must be"},
    {"fab sides top\nfab sides top", 2, "sides: given twice"},
    {"fab tolerance", 1, "tolerance is missing"},
    {"fab tolerance best", 1, "tolerance = 'best': must be worst, or rss"},
    {"fab depths", 1, "depths: needs one length or more"},
    {"fab depths 1 mm 2", 1, "depths = 2: needs a unit"},
    {"fab depths 1 mm -2 mm", 1, "depths = -2 mm: must be > 0"},
    {DEPTH DEPTH, 2, "depths: given twice"},
    {"fab colour 1 mm", 1, "'colour': unknown word"},
    {"# \xC3\xA9 is fine\n# \xE9 is not", 2, "line 2|0xE9|UTF-8"},
    {"# cut short \xE2\x82", 1, "UTF-8"},
};

START_TEST(refused_with_the_line)
{
    lstub_rules *rules = (lstub_rules *)&err;
    const char *text = bad[_i].text;
    assert_refused(lstub_rules_parse(text, strlen(text), NULL, &rules, &err), LSTUB_E_FORMAT, err, bad[_i].words);
    ck_assert_msg(err.index == bad[_i].line, "line %ld: %s", (long)err.index, err.message);
    ck_assert_ptr_eq(rules, (lstub_rules *)&err);
    ck_assert_int_eq(lstub_rules_parse(text, strlen(text), NULL, &rules, NULL), LSTUB_E_FORMAT);
}
END_TEST

START_TEST(no_text_at_all)
{
    static char large[1048577];
    lstub_rules *rules = NULL;
    assert_refused(lstub_rules_parse("net a\0b", 7, NULL, &rules, &err), LSTUB_E_FORMAT, err, "line 1|zero byte");
    assert_refused(lstub_rules_parse(NULL, 0, NULL, &rules, &err), LSTUB_E_NULL, err, "text");
    assert_refused(lstub_rules_parse("", 0, NULL, NULL, &err), LSTUB_E_NULL, err, "out");
    memset(large, '\n', sizeof large);
    assert_refused(lstub_rules_parse(large, sizeof large, NULL, &rules, &err), LSTUB_E_FORMAT, err, "1048576|too large");
    assert_ok(lstub_rules_parse(large, sizeof large - 1, NULL, &rules, &err), err);
    lstub_rules_destroy(rules);
    memset(large, 'x', sizeof large);
    assert_refused(lstub_rules_parse(large, 2000, NULL, &rules, &err), LSTUB_E_FORMAT, err, "unknown rule");
    memcpy(large, "net ", 4);
    assert_refused(lstub_rules_parse(large, 2000, NULL, &rules, &err), LSTUB_E_FORMAT, err, "longer than");
    assert_ok(lstub_rules_parse("\xEF\xBB\xBFsignal x symbol_rate 1 GBd added_loss 1 dB", 45, NULL, &rules, &err), err);
    ck_assert_int_eq(lstub_rules_signal_count(rules), 1);
    lstub_rules_destroy(rules);
}
END_TEST

START_TEST(files)
{
    static const char path[] = "check_rules.tmp";
    FILE *file = fopen(path, "wb");
    lstub_rules *rules = NULL;
    ck_assert_ptr_nonnull(file);
    fputs(good, file);
    fclose(file);
    assert_ok(lstub_rules_load(path, NULL, &rules, &err), err);
    capability_as_written(rules);
    lstub_rules_destroy(rules);
    remove(path);
    assert_refused(lstub_rules_load(path, NULL, &rules, &err), LSTUB_E_READ, err, "check_rules.tmp|No such file");
    assert_refused(lstub_rules_load(".", NULL, &rules, &err), LSTUB_E_READ, err, "'.'|directory");
    assert_refused(lstub_rules_load(NULL, NULL, &rules, &err), LSTUB_E_NULL, err, "path");
    assert_refused(lstub_rules_load("/dev/zero", NULL, &rules, &err), LSTUB_E_FORMAT, err, "too large");
}
END_TEST

START_TEST(out_of_memory)
{
    test_memory memory;
    lstub_allocator allocator = test_allocator(&memory);
    lstub_rules *rules = NULL;
    long fail, calls;
    assert_ok(lstub_rules_parse(good, strlen(good), &allocator, &rules, &err), err);
    calls = memory.calls;
    lstub_rules_destroy(rules);
    ck_assert_int_eq(memory.live, 0);
    ck_assert_int_gt(calls, 5);
    for (fail = 1; fail <= calls; fail++) {
        allocator = test_allocator(&memory);
        memory.fail_at = fail;
        assert_refused(lstub_rules_parse(good, strlen(good), &allocator, &rules, &err), LSTUB_E_MEMORY, err, "memory");
        ck_assert_int_eq(memory.live, 0);
    }
}
END_TEST

/* Every text cut short anywhere, and with any byte spoilt: an answer or an error, with the sanitizers watching. */
START_TEST(spoilt_text)
{
    char text[2048];
    size_t n = strlen(good), i;
    long answers = 0;
    for (i = 0; i < 3 * n; i++) {
        lstub_rules *rules = NULL;
        memcpy(text, good, n);
        if (i >= n)
            text[i % n] = (char)(unsigned char)(test_random(3, i) * 256.0);
        LSTUB_INIT(err);
        if (lstub_rules_parse(text, i < n ? i : n, NULL, &rules, &err) == LSTUB_OK)
            answers++;
        else
            ck_assert_msg(err.status == LSTUB_E_FORMAT && err.index >= 1, "%s", err.message);
        lstub_rules_destroy(rules);
    }
    ck_assert_int_gt(answers, 50);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("rules");
    TCase *tests = tcase_create("rules");
    tcase_add_test(tests, signals_as_written);
    tcase_add_test(tests, first_match_wins);
    tcase_add_test(tests, patterns);
    tcase_add_test(tests, what_the_reader_asks);
    tcase_add_test(tests, capability_and_copy);
    tcase_add_loop_test(tests, refused_with_the_line, 0, (int)COUNT(bad));
    tcase_add_test(tests, no_text_at_all);
    tcase_add_test(tests, files);
    tcase_add_test(tests, out_of_memory);
    tcase_add_test(tests, spoilt_text);
    suite_add_tcase(suite, tests);
    return test_main(suite);
}
