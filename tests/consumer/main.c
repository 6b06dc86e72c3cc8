/* Uses both libraries as a program outside the project does. */
#include <libstub.h>
#include <libstub_ipc2581.h>

#include <stdio.h>
#include <string.h>

static const char rules_text[] = "signal fast symbol_rate 53.125 GBd levels 4 notch_over_nyquist 2\nnet F_* fast\n";

int main(void)
{
    lstub_error  err;
    lstub_rules *rules = NULL;
    int32_t      signal = -2;
    double       f1 = 0.0;
    LSTUB_INIT(err);
    if (lstub_abi() != LSTUB_ABI || lstub_quarter_wave_frequency(1e-3, 4.0, 1, &f1, &err) != LSTUB_OK)
        return 1;
    if (lstub_rules_parse(rules_text, strlen(rules_text), NULL, &rules, &err) != LSTUB_OK
        || lstub_rules_match(rules, "F_7", &signal, &err) != LSTUB_OK || signal != 0) {
        fprintf(stderr, "%s\n", err.message);
        return 1;
    }
    lstub_rules_destroy(rules);
    printf("libstub %s: 1 mm at Dk 4: %.3f GHz\n", lstub_version(), f1 * 1e-9);
    return f1 > 37.47e9 && f1 < 37.48e9 ? 0 : 1;
}
