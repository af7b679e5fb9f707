/* The judge: takes a stack's layers in order and says all that can be said about it. One engine for
 * survey, for every round of prop, and for recheck; so what prop believed and what recheck reads
 * from the written files are held against each other by the same functions.
 *
 * Its memory is a batch of sheets, the clearance window, and summaries of bodies, posts and layers.
 */
#ifndef FW_CHECK_JUDGE_H
#define FW_CHECK_JUDGE_H

#include "check/ground.h"
#include "check/report.h"
#include "check/share.h"
#include "fault/times.h"

typedef struct fw_judge fw_judge;

typedef struct fw_judge_input {
    const fw_job *job;       /* borrowed, as all pointers here */
    int32_t width, height;   /* px */
    int32_t layers, lift;    /* of the stack under judgement; layers that the lift prepended */
    int32_t full;            /* grey of a fully lit pixel */
    const fw_posts *posts;   /* NULL: none */
    const fw_placer *placer; /* places tips while layers pass (posts may grow then); NULL: judges.
                                With a placer posts are not looked for in the pixels. */
    fw_times *times;         /* NULL, or where the time goes is added to it */
    fw_film_memo *memo;      /* needed when both cards are there */
} fw_judge_input;

fw_status fw_judge_new(const fw_judge_input *input, fw_judge **out, fw_fault *fault);

/* Takes the next layers, one after the other. */
fw_status fw_judge_layers(fw_judge *judge, const fw_greys *const *layers, int32_t count,
                          fw_fault *fault);

/* An occurrence that only the caller can see (an altered part); before fw_judge_finish. */
fw_status fw_judge_note(fw_judge *judge, const fw_finding *finding, fw_fault *fault);

/* Closes the stack and fills *out (free with fw_report_free). The digests are the caller's. */
fw_status fw_judge_finish(fw_judge *judge, fw_report *out, fw_fault *fault);

/* What posts carried and what was seen in each layer so far ([layers]), and the setup: for sizing.
 * Valid until the judge is finished or freed. */
const fw_layer_row *fw_judge_rows(const fw_judge *judge);
const fw_share *fw_judge_share(const fw_judge *judge);
const fw_setup *fw_judge_setup(const fw_judge *judge);
void fw_judge_free(fw_judge *judge);

#endif
