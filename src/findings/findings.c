#include "findings/findings.h"

#include "fault/memory.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

typedef struct kind_row {
    const char *name, *advice;
} kind_row;

static const kind_row kinds[FW_KIND_COUNT] = {
    [FW_ONSET] = {"onset", "starts in mid-resin with nothing holding it: it needs a post"},
    [FW_ADRIFT] = {"adrift", "has no path to the plate yet: it would float away or stick to the "
                             "window"},
    [FW_OVERREACH] = {"overreach", "fresh solid reaches further from what holds it than this resin "
                                   "allows: add a tip nearer to it"},
    [FW_GAP_LAYER] = {"gap-layer", "an empty layer between layers with something: the part would "
                                   "part there; check the export"},
    [FW_UNDERCURE] = {"undercure",
                      "the masks ask for more than this exposure cures through the layer: "
                      "expose more, slice thinner, or draw it in full grey"},
    [FW_BLIND_CAVITY] = {"blind-cavity",
                         "closed toward the plate and around, open only at the "
                         "window: it sucks while peeling; a vent near its plate end "
                         "relieves it"},
    [FW_POOR_VENT] = {"poor-vent",
                      "a cavity whose way to the vat is too narrow to relieve it: it sucks "
                      "as if it were closed; widen the vent"},
    [FW_ENCLOSED_RESIN] = {"enclosed-resin", "liquid resin stays in the part: give it a drain, and "
                                             "treat what stays as uncured resin"},
    [FW_TIP_OVERLOAD] = {"tip-overload", "the contact carries more than the green strength allows: "
                                         "more or larger tips"},
    [FW_NECK_OVERLOAD] = {"neck-overload", "the taper carries more than the green strength allows"},
    [FW_SHAFT_OVERLOAD] = {"shaft-overload", "the column carries more than the green strength "
                                             "allows"},
    [FW_SHAFT_BUCKLING] = {"shaft-buckling",
                           "the post is pushed, by the way back to the window or by "
                           "lever action, and is too slender for it: a wider shaft"},
    [FW_FOOT_OVERLOAD] = {"foot-overload", "the foot pulls harder on the plate than the resin "
                                           "adheres: a larger foot"},
    [FW_PLATE_OVERLOAD] = {"plate-overload", "the part pulls harder on the plate than the resin "
                                             "adheres: more contact with the plate"},
    [FW_DRIVE_OVERLOAD] = {"drive-overload",
                           "the peel load is above the stated limit: slower, or a "
                           "smaller section a layer"},
    [FW_CLEARANCE] = {"clearance",
                      "a post runs closer to the part than the job allows: it may fuse"},
    [FW_UNROUTABLE] = {"unroutable",
                       "no path from this tip to the plate within lean and clearance: "
                       "turn the part, or allow more lean"},
    [FW_STUB] = {"stub",
                 "a shaft that ends short of the part, or of the plate, or is broken between"},
    [FW_ALTERED_PART] = {"altered-part",
                         "the stack differs from the raw stack outside the posts: do "
                         "not release it"},
    [FW_NEW_VOID] = {"new-void", "the posts close off a pocket of resin that the raw stack leaves "
                                 "open"},
    [FW_BORDER_SOLID] = {"border-solid",
                         "solid touches the border of the image: it may be cut off"},
    [FW_ASSUMED_VALUE] = {"assumed-value",
                          "a card value is assumed, not measured: the margins rest "
                          "on it"},
    [FW_COARSE_FILM] = {"coarse-film",
                        "the film is too finely cut for the memory allowed and was solved on "
                        "coarser cells: its load is some percent off, mostly too high"},
    [FW_UNSETTLED] = {"unsettled", "loads and sizes did not agree within the allowed rounds"},
};

static const char *const severities[] = {"note", "warn", "fail"};

const char *fw_kind_name(fw_kind kind)
{
    return kinds[kind].name;
}

fw_kind fw_kind_from_name(const char *name)
{
    int kind = 0;
    while (kind < FW_KIND_COUNT && strcmp(kinds[kind].name, name) != 0)
        kind++;
    return (fw_kind)kind;
}

const char *fw_kind_advice(fw_kind kind)
{
    return kinds[kind].advice;
}

const char *fw_severity_name(fw_severity severity)
{
    return severities[severity];
}

static void join(fw_finding *into, const fw_finding *other)
{
    into->count += other->count;
    into->pixels += other->pixels;
    into->area_mm2 += other->area_mm2;
    if (other->layer < into->layer)
        into->layer = other->layer;
    if (other->last_layer > into->last_layer)
        into->last_layer = other->last_layer;
    if (other->severity > into->severity)
        into->severity = other->severity;
    into->margin = fmin(into->margin, other->margin); /* fmin ignores a NAN */
    if (other->badness > into->badness) {
        into->badness = other->badness;
        into->worst_layer = other->worst_layer;
        into->x_mm = other->x_mm;
        into->y_mm = other->y_mm;
        into->post = other->post;
        memcpy(into->message, other->message, sizeof into->message);
    }
}

fw_status fw_findings_add(fw_findings *list, const fw_finding *occurrence, fw_fault *fault)
{
    fw_finding one = *occurrence;
    one.count = 1;
    one.last_layer = one.worst_layer = one.layer;
    for (size_t i = list->count; i-- > 0;) { /* the newest group is the likeliest */
        if (list->item[i].kind == one.kind && list->item[i].group == one.group) {
            join(&list->item[i], &one);
            return FW_OK;
        }
    }
    FW_TRY(fw_grow((void **)&list->item, &list->capacity, list->count + 1, sizeof *list->item,
                   "findings", fault));
    list->item[list->count++] = one;
    return FW_OK;
}

void fw_findings_regroup(fw_findings *list, fw_kind kind, uint64_t (*rename)(void *, uint64_t),
                         void *context)
{
    size_t kept = 0;
    for (size_t i = 0; i < list->count; i++) {
        fw_finding one = list->item[i];
        if (one.kind == kind)
            one.group = rename(context, one.group);
        size_t same = 0;
        while (same < kept &&
               (list->item[same].kind != one.kind || list->item[same].group != one.group))
            same++;
        if (same < kept)
            join(&list->item[same], &one);
        else
            list->item[kept++] = one;
    }
    list->count = kept;
}

static int compare_double(double a, double b)
{
    return (a > b) - (a < b);
}

static int in_order(const void *left, const void *right)
{
    const fw_finding *a = left, *b = right;
    if (a->severity != b->severity)
        return a->severity > b->severity ? -1 : 1;
    if (a->kind != b->kind)
        return a->kind < b->kind ? -1 : 1;
    if (a->layer != b->layer)
        return a->layer < b->layer ? -1 : 1;
    int order = compare_double(a->y_mm, b->y_mm);
    if (order == 0)
        order = compare_double(a->x_mm, b->x_mm);
    return order != 0 ? order : (a->group > b->group) - (a->group < b->group);
}

void fw_findings_sort(fw_findings *list)
{
    if (list->count > 0)
        qsort(list->item, list->count, sizeof *list->item, in_order);
}

int64_t fw_findings_count(const fw_findings *list, fw_severity severity)
{
    int64_t count = 0;
    for (size_t i = 0; i < list->count; i++)
        count += list->item[i].severity == severity;
    return count;
}

void fw_findings_free(fw_findings *list)
{
    free(list->item);
    *list = (fw_findings){0};
}
