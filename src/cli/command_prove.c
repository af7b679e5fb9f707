#include "cli/commands.h"
#include "cli/say.h"
#include "falsework/prove.h"

#include <math.h>
#include <stdio.h>

/* ---- the table ---- */

static void print_head(void)
{
    (void)printf("%-6s %-54s %5s %14s %14s %9s %11s %-4s  %s\n", "check", "what", "value",
                 "expected", "computed", "error", "allowed", "", "source");
}

/* Several values in a check: the worst of them, as 2/6. */
static falsework_status print_row(void *unused, const falsework_proof *proof)
{
    (void)unused;
    if (proof->kind == FALSEWORK_PROOF_NOT_COMPUTED) {
        (void)printf("%-6s %-54s %5s %14s %14s %9s %11s %-4s  not computed here: %s\n", proof->id,
                     proof->what, "-", "-", "-", "-", "-", "-", proof->source);
        return FALSEWORK_OK;
    }
    static const char *const unit[] = {[FALSEWORK_PROOF_RELATIVE] = "rel",
                                       [FALSEWORK_PROOF_ABSOLUTE] = "abs",
                                       [FALSEWORK_PROOF_AT_MOST] = "top"};
    char value[16], allowed[32];
    (void)snprintf(value, sizeof value, "%d/%d", proof->worst + 1, proof->count);
    (void)snprintf(allowed, sizeof allowed, "%.1e %s", proof->tolerance, unit[proof->kind]);
    (void)printf("%-6s %-54s %5s %14.10g %14.10g %9.1e %11s %-4s  %s\n", proof->id, proof->what,
                 value, proof->expected[proof->worst], proof->computed[proof->worst], proof->error,
                 allowed, proof->passed ? "pass" : "FAIL", proof->source);
    return FALSEWORK_OK;
}

static void print_sum(falsework_proved proved)
{
    (void)printf("%d checks: %d pass, %d fail; %d more are not computed here.\n",
                 proved.passed + proved.failed, proved.passed, proved.failed, proved.not_computed);
}

/* ---- JSON ---- */

static void json_text(const char *key, const char *text)
{
    (void)printf("\"%s\": \"", key);
    for (; *text != '\0'; text++) {
        if (*text == '"' || *text == '\\')
            (void)putchar('\\');
        (void)putchar(*text);
    }
    (void)putchar('"');
}

static void json_number(double value)
{
    if (isfinite(value))
        (void)printf("%.17g", value);
    else
        (void)fputs("null", stdout);
}

static void json_numbers(const char *key, const double *value, int count)
{
    (void)printf(", \"%s\": [", key);
    for (int i = 0; i < count; i++) {
        (void)fputs(i > 0 ? ", " : "", stdout);
        json_number(value[i]);
    }
    (void)putchar(']');
}

/* context: whether a row came before. */
static falsework_status json_row(void *context, const falsework_proof *proof)
{
    static const char *const kind[] = {[FALSEWORK_PROOF_RELATIVE] = "relative",
                                       [FALSEWORK_PROOF_ABSOLUTE] = "absolute",
                                       [FALSEWORK_PROOF_AT_MOST] = "at-most",
                                       [FALSEWORK_PROOF_NOT_COMPUTED] = "not-computed"};
    bool *more = context;
    (void)fputs(*more ? ",\n    {" : "\n    {", stdout);
    *more = true;
    json_text("id", proof->id);
    (void)fputs(", ", stdout);
    json_text("what", proof->what);
    (void)fputs(", ", stdout);
    json_text("kind", kind[proof->kind]);
    if (proof->kind != FALSEWORK_PROOF_NOT_COMPUTED) {
        json_numbers("expected", proof->expected, proof->count);
        json_numbers("computed", proof->computed, proof->count);
        (void)printf(", \"worst\": %d, \"error\": ", proof->worst);
        json_number(proof->error);
        (void)fputs(", \"tolerance\": ", stdout);
        json_number(proof->tolerance);
        (void)printf(", \"passed\": %s", proof->passed ? "true" : "false");
    }
    (void)fputs(", ", stdout);
    json_text(proof->kind == FALSEWORK_PROOF_NOT_COMPUTED ? "reason" : "source", proof->source);
    (void)putchar('}');
    return FALSEWORK_OK;
}

static void json_head(void)
{
    (void)printf("{\n  \"format\": \"falsework-prove/1\",\n  \"version\": \"%s\",\n  \"checks\": [",
                 falsework_version());
}

static void json_sum(falsework_proved proved)
{
    (void)printf("\n  ],\n  \"passed\": %d,\n  \"failed\": %d,\n  \"not_computed\": %d\n}\n",
                 proved.passed, proved.failed, proved.not_computed);
}

/* ---- the command ---- */

/* The head comes with the first check: nothing is printed where they could not be computed. */
typedef struct page {
    bool json, begun, more;
} page;

static falsework_status take(void *context, const falsework_proof *proof)
{
    page *now = context;
    if (!now->begun)
        (now->json ? json_head : print_head)();
    now->begun = true;
    return now->json ? json_row(&now->more, proof) : print_row(NULL, proof);
}

static int run(const fw_arguments *arguments)
{
    falsework_fault fault = {0};
    falsework_proved proved;
    page now = {.json = arguments->json};
    const falsework_options options = fw_say_options(arguments, NULL);
    if (falsework_prove(&options, take, &now, &proved, &fault) != FALSEWORK_OK)
        return fw_say_done(fw_say_fault(&fault));
    (now.json ? json_sum : print_sum)(proved);
    return fw_say_done(proved.failed > 0 ? FALSEWORK_GATE : FALSEWORK_OK);
}

const fw_command fw_command_prove = {
    .name = "prove",
    .one_line = "the table of handbook checks, run on this machine",
    .help = "usage: falsework prove [--json] [--threads N]\n"
            "\n"
            "Holds what the kernels of this program compute on this machine against published\n"
            "and hand-worked values: film and suction cap, tilting plate, machine that gives,\n"
            "cure, columns, beams, posts in a group. Takes no stack. One line a check; where a\n"
            "check has several values (2/6: the second of six) the worst of them is shown, and\n"
            "all must hold. What no kernel computes is listed with the reason.\n"
            "\n"
            "  allowed         rel: of the expected value; abs: in its own unit; top: the\n"
            "                  expected value is an upper bound\n"
            "  --json          all values, as JSON\n"
            "  --threads N     as many as the machine has, unless said\n"
            "\n"
            "Exit status: 0 all pass, 1 one fails, 2 bad usage, 3 the machine failed us.\n",
    .takes = FW_TAKES_PROVE,
    .run = run,
};
