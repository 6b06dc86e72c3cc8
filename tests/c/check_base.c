/* Status, messages, structs of other sizes, memory: seen from outside, through the simplest functions there are. */
#include "check_util.h"

static const struct {
    int32_t     status;
    const char *name;
} statuses[] = {
    {0, "LSTUB_OK"},           {1, "LSTUB_W_RANGE"},      {2, "LSTUB_W_CAPACITY"},  {-1, "LSTUB_E_ARGUMENT"},
    {-2, "LSTUB_E_NULL"},      {-3, "LSTUB_E_SIZE"},      {-4, "LSTUB_E_NEWER"},    {-5, "LSTUB_E_MEMORY"},
    {-6, "LSTUB_E_GEOMETRY"},  {-7, "LSTUB_E_NONE"},      {-8, "LSTUB_E_UNSUPPORTED"}, {-9, "LSTUB_E_MIXED"},
    {-10, "LSTUB_E_READ"},     {-11, "LSTUB_E_WRITE"},    {-12, "LSTUB_E_FORMAT"},
};

/* The numbers are for ever: written out here, not taken from the header. */
START_TEST(status_names)
{
    ck_assert_str_eq(lstub_status_name(statuses[_i].status), statuses[_i].name);
}
END_TEST

START_TEST(unknown_status_has_a_name)
{
    ck_assert_ptr_nonnull(lstub_status_name(12345));
    ck_assert_ptr_nonnull(lstub_status_name(INT32_MIN));
}
END_TEST

START_TEST(versions)
{
    ck_assert_str_eq(lstub_version(), LSTUB_VERSION);
    ck_assert_int_eq(lstub_abi(), LSTUB_ABI);
    ck_assert_int_ge(lstub_model_revision(), 1);
}
END_TEST

START_TEST(init_zeroes_and_sets_the_size)
{
    lstub_via via;
    memset(&via, POISON, sizeof via);
    LSTUB_INIT(via);
    ck_assert_uint_eq(via.size, sizeof via);
    for (size_t i = sizeof via.size; i < sizeof via; i++)
        ck_assert_int_eq(((const char *)&via)[i], 0);
    lstub_init(NULL, 8);
}
END_TEST

/* A dielectric stands for all input structs: they are taken in one place. */
static int32_t permittivity(const void *dielectric, lstub_error *err)
{
    double f = 1e9, eps[2];
    return lstub_dielectric_permittivity(dielectric, &f, 1, eps, NULL, err);
}

typedef struct newer_dielectric {
    lstub_dielectric d;
    double added, added_too;
} newer_dielectric;

static newer_dielectric newer(void)
{
    newer_dielectric n;
    lstub_init(&n, sizeof n);
    n.d.dk = 4.0;
    return n;
}

START_TEST(newer_struct_with_a_zero_tail_is_accepted)
{
    newer_dielectric n = newer();
    lstub_error err;
    LSTUB_INIT(err);
    assert_ok(permittivity(&n, &err), err);
}
END_TEST

START_TEST(newer_struct_that_asks_for_more_is_refused)
{
    newer_dielectric n = newer();
    lstub_error err;
    n.added_too = 1e-9;
    assert_refused(permittivity(&n, &err), LSTUB_E_NEWER, err, "dielectric|0.1.0");
}
END_TEST

START_TEST(size_that_cannot_be)
{
    static const size_t sizes[] = {0, 1, sizeof(lstub_dielectric) - 1, (size_t)1 << 20, SIZE_MAX};
    lstub_error err;
    lstub_dielectric d;
    LSTUB_INIT(d);
    d.dk = 4.0;
    d.size = sizes[_i];
    assert_refused(permittivity(&d, &err), LSTUB_E_SIZE, err, "dielectric|size|bytes");
}
END_TEST

START_TEST(null_struct)
{
    lstub_error err;
    assert_refused(permittivity(NULL, &err), LSTUB_E_NULL, err, "dielectric|null");
}
END_TEST

START_TEST(error_may_be_null_or_unusable)
{
    lstub_error err;
    double f;
    ck_assert_int_eq(lstub_quarter_wave_frequency(-1.0, 4.0, 1, &f, NULL), LSTUB_E_ARGUMENT);
    memset(&err, POISON, sizeof err);
    err.size = 0;                       /* never initialised: written to by nobody */
    ck_assert_int_eq(lstub_quarter_wave_frequency(-1.0, 4.0, 1, &f, &err), LSTUB_E_ARGUMENT);
    assert_untouched(err);
}
END_TEST

START_TEST(newer_error_struct_is_filled)
{
    struct {
        lstub_error err;
        double      added;
    } e;
    double f;
    lstub_init(&e, sizeof e);
    ck_assert_int_eq(lstub_quarter_wave_frequency(-1.0, 4.0, 1, &f, &e.err), LSTUB_E_ARGUMENT);
    ck_assert_int_eq(e.err.status, LSTUB_E_ARGUMENT);
    ck_assert_str_eq(e.err.field, "length");
    ck_assert_int_eq(e.err.index, -1);
    ck_assert_uint_eq(e.err.size, sizeof e);
    ck_assert(e.added == 0.0);
}
END_TEST

/* A program in a country with decimal commas reads the same messages, and the same numbers. */
#include <locale.h>

START_TEST(messages_do_not_follow_the_locale)
{
    char plain[256];
    lstub_error err;
    double f;
    const char *name = getenv("LSTUB_COMMA_LOCALE");
    if (name == NULL || setlocale(LC_ALL, name) == NULL) {
        ck_assert_msg(name == NULL, "locale '%s' cannot be set", name);
        return;                          /* run as c.locale where such a locale could be made */
    }
    snprintf(plain, sizeof plain, "%.1f", 0.5);
    ck_assert_str_eq(plain, "0,5");      /* the locale is what it should be */
    assert_refused(lstub_quarter_wave_frequency(-0.0015, 4.0, 1, &f, &err), LSTUB_E_ARGUMENT, err, "length|-0.0015|m");
    assert_refused(lstub_coax(2.5e-4, 1.25e-4, 4.0, &f, NULL, NULL, &err), LSTUB_E_GEOMETRY, err, "0.000125");
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("base");
    TCase *status = tcase_create("status"), *structs = tcase_create("structs"), *errors = tcase_create("errors");
    tcase_add_loop_test(status, status_names, 0, (int)COUNT(statuses));
    tcase_add_test(status, unknown_status_has_a_name);
    tcase_add_test(status, versions);
    tcase_add_test(structs, init_zeroes_and_sets_the_size);
    tcase_add_test(structs, newer_struct_with_a_zero_tail_is_accepted);
    tcase_add_test(structs, newer_struct_that_asks_for_more_is_refused);
    tcase_add_loop_test(structs, size_that_cannot_be, 0, 5);
    tcase_add_test(structs, null_struct);
    tcase_add_test(errors, error_may_be_null_or_unusable);
    tcase_add_test(errors, newer_error_struct_is_filled);
    tcase_add_test(errors, messages_do_not_follow_the_locale);
    suite_add_tcase(suite, status);
    suite_add_tcase(suite, structs);
    suite_add_tcase(suite, errors);
    return test_main(suite);
}
