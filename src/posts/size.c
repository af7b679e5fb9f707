#include "posts/size.h"

#include "posts/profile.h"

#include <math.h>

enum { UM = 1000 }; /* per mm */

/* Diameters in whole um, both ends allowed. */
typedef struct range {
    int64_t low, high;
} range;

/* A post with the diameters under trial, and how many solid pixels each check needs. */
typedef struct sizing {
    const fw_size_input *in;
    fw_post post;
    int64_t need[FW_POST_CHECKS]; /* INT64_MAX = no number of pixels is enough */
} sizing;

static bool enough(const fw_size_input *in, fw_post_check check, int64_t pixels)
{
    double area_mm2 = (double)pixels * in->screen->px_mm * in->screen->py_mm;
    return fw_margin_of(in->resin, check, area_mm2, in->demand.load_N[check]) >= in->rules->margin;
}

/* The smallest number of pixels that holds, judged by the very margin that is reported later. */
static int64_t pixels_needed(const fw_size_input *in, fw_post_check check)
{
    if (!(in->demand.load_N[check] > 0.0))
        return 0;
    double pixel_mm2 = in->screen->px_mm * in->screen->py_mm;
    double one = fw_margin_of(in->resin, check, pixel_mm2, in->demand.load_N[check]);
    double guess = ceil(in->rules->margin / one);
    if (!(guess < 1e15))
        return INT64_MAX;
    int64_t need = (int64_t)guess;
    while (need > 0 && enough(in, check, need - 1))
        need--;
    while (!enough(in, check, need))
        need++;
    return need;
}

/* The section of a layer; a post without a route is taken to stand vertically under its tip. */
static fw_disc section_of(const sizing *s, int32_t layer)
{
    double z_mm = fw_post_middle(layer, s->in->layer_mm);
    fw_disc disc = {s->post.path[0].x, s->post.path[0].y, 0.0};
    disc.diameter_mm = fw_post_diameter(&s->post, z_mm, fw_post_face(&s->post, s->in->layer_mm));
    if (s->post.routed)
        fw_post_centre(&s->post, z_mm, &disc.x_mm, &disc.y_mm);
    return disc;
}

static bool section_holds(const sizing *s, fw_post_check check, int32_t layer)
{
    fw_disc disc = section_of(s, layer);
    return fw_disc_holds(s->in->screen, &disc, s->in->solid_least, s->need[check]);
}

static int64_t shared_length(fw_run a, fw_run b)
{
    int32_t from = a.x0 > b.x0 ? a.x0 : b.x0, to = a.x1 < b.x1 ? a.x1 : b.x1;
    return to > from ? to - from : 0;
}

/* What is solid both in the tip layer and in the one before. */
static int64_t contact_pixels(const sizing *s)
{
    const fw_screen *screen = s->in->screen;
    fw_disc tip = section_of(s, s->post.tip_layer);
    if (s->post.tip_layer == 0)
        return fw_disc_count(screen, &tip, s->in->solid_least);
    fw_disc before = section_of(s, s->post.tip_layer - 1);
    int32_t y0, y1;
    fw_disc_rows(screen, &tip, &y0, &y1);
    int64_t count = 0;
    for (int32_t y = y0; y < y1; y++)
        count += shared_length(fw_disc_row_solid(screen, &tip, y, s->in->solid_least),
                               fw_disc_row_solid(screen, &before, y, s->in->solid_least));
    return count;
}

/* Neck sections are layers [neck_start, tip_layer). */
static int32_t neck_start(const sizing *s)
{
    double face_mm = fw_post_face(&s->post, s->in->layer_mm);
    int32_t layer = s->post.tip_layer;
    while (layer > 0 && face_mm - fw_post_middle(layer - 1, s->in->layer_mm) <= s->post.neck_mm)
        layer--;
    return layer;
}

/* A trial: sets the diameter and tells whether the check holds in a layer. */
typedef bool (*trial)(sizing *, int64_t um, int32_t layer);

/* Until the shaft is known the narrowest one allowed is assumed, which makes the neck no wider than
 * it will be. The foot is not counted on. */
static void set_tip(sizing *s, int64_t um)
{
    s->post.tip_mm = (double)um / UM;
    s->post.shaft_mm = fmax(s->in->rules->shaft_mm[0], s->post.tip_mm);
    s->post.foot_mm = s->post.shaft_mm;
}

static bool contact_holds(sizing *s, int64_t um, int32_t layer)
{
    (void)layer;
    set_tip(s, um);
    return contact_pixels(s) >= s->need[FW_POST_TIP];
}

static bool neck_holds(sizing *s, int64_t um, int32_t layer)
{
    set_tip(s, um);
    return section_holds(s, FW_POST_NECK, layer);
}

static bool shaft_holds(sizing *s, int64_t um, int32_t layer)
{
    s->post.shaft_mm = s->post.foot_mm = (double)um / UM;
    return section_holds(s, FW_POST_SHAFT, layer);
}

/* margin: NAN where nothing pushes. */
static bool stands(const sizing *s)
{
    const double margin =
        fw_post_push_margin(&s->post, s->in->resin->modulus_MPa, s->in->layer_mm, &s->in->push);
    return !(margin < s->in->rules->margin);
}

static bool shaft_stands(sizing *s, int64_t um, int32_t layer)
{
    (void)layer;
    s->post.shaft_mm = s->post.foot_mm = (double)um / UM;
    return stands(s);
}

static bool foot_holds(sizing *s, int64_t um, int32_t layer)
{
    s->post.foot_mm = (double)um / UM;
    return section_holds(s, FW_POST_FOOT, layer);
}

/* The smallest diameter in the range for which the trial holds; the largest when none does. */
static int64_t smallest(sizing *s, range allowed, trial holds, int32_t layer)
{
    if (allowed.low >= allowed.high || holds(s, allowed.low, layer))
        return allowed.low;
    if (!holds(s, allowed.high, layer))
        return allowed.high;
    while (allowed.high - allowed.low > 1) {
        int64_t middle = allowed.low + (allowed.high - allowed.low) / 2;
        if (holds(s, middle, layer))
            allowed.high = middle;
        else
            allowed.low = middle;
    }
    return allowed.high;
}

/* The smallest diameter for which the trial holds in all layers [from, to). */
static int64_t smallest_over(sizing *s, range allowed, trial holds, int32_t from, int32_t to)
{
    for (int32_t layer = from; layer < to; layer++)
        allowed.low = smallest(s, allowed, holds, layer);
    return allowed.low;
}

/* Whole um inside [low_mm, high_mm], raised to `least` and, when diameters may only grow, to
 * now_mm; what raises it beats the upper limit. */
static range allowed_range(const sizing *s, double low_mm, double high_mm, int64_t least,
                           double now_mm)
{
    const double round_off = 1e-6;
    int64_t low = (int64_t)ceil(low_mm * UM - round_off);
    if (s->in->grow_only && now_mm > low_mm)
        low = (int64_t)ceil(now_mm * UM - round_off);
    if (low < least)
        low = least;
    int64_t high = (int64_t)floor(high_mm * UM + round_off);
    return (range){low, high < low ? low : high};
}

static int64_t size_tip(sizing *s, const fw_post *now, int32_t neck)
{
    const double *limit = s->in->rules->tip_mm;
    range allowed = allowed_range(s, limit[0], limit[1], 1, now->tip_mm);
    allowed.low = smallest(s, allowed, contact_holds, s->post.tip_layer);
    return smallest_over(s, allowed, neck_holds, neck, s->post.tip_layer);
}

static int64_t size_shaft(sizing *s, const fw_post *now, int64_t tip, int32_t neck)
{
    const double *limit = s->in->rules->shaft_mm;
    range allowed = allowed_range(s, limit[0], limit[1], tip, now->shaft_mm);
    allowed.low = smallest(s, allowed, shaft_stands, 0);
    return smallest_over(s, allowed, shaft_holds, 0, neck);
}

static int64_t size_foot(sizing *s, const fw_post *now, int64_t shaft)
{
    double limit_mm = fmin(s->in->rules->foot_mm, fmax(s->in->foot_room_mm, 0.0));
    range allowed = allowed_range(s, 0.0, limit_mm, shaft, now->foot_mm);
    return smallest(s, allowed, foot_holds, 0);
}

static void choose(sizing *s, const fw_post *now)
{
    int32_t neck = neck_start(s);
    int64_t tip = size_tip(s, now, neck);
    set_tip(s, tip);
    int64_t shaft = size_shaft(s, now, tip, neck);
    s->post.shaft_mm = (double)shaft / UM;
    s->post.foot_mm = (double)size_foot(s, now, shaft) / UM;
}

/* Which checks fail at the diameters that the post has now. The flare counts as shaft. */
static unsigned missed_checks(const sizing *s)
{
    const double face_mm = fw_post_face(&s->post, s->in->layer_mm);
    unsigned missed = 0;
    if (contact_pixels(s) < s->need[FW_POST_TIP])
        missed |= FW_MISSED_TIP;
    if (!section_holds(s, FW_POST_FOOT, 0))
        missed |= FW_MISSED_FOOT;
    for (int32_t layer = 0; layer < s->post.tip_layer; layer++) {
        fw_zone zone = fw_post_zone(&s->post, fw_post_middle(layer, s->in->layer_mm), face_mm);
        fw_post_check check = zone == FW_ZONE_NECK ? FW_POST_NECK : FW_POST_SHAFT;
        if (!section_holds(s, check, layer))
            missed |= 1u << check;
    }
    if (s->post.foot_mm > s->in->foot_room_mm)
        missed |= FW_MISSED_ROOM;
    if (!stands(s))
        missed |= FW_MISSED_PUSH;
    return missed;
}

static bool usable(double diameter_mm)
{
    const double largest_mm = 1e4;
    return diameter_mm >= 0.0 && diameter_mm <= largest_mm;
}

static bool rules_usable(const fw_post_rules *rules)
{
    return usable(rules->tip_mm[0]) && usable(rules->tip_mm[1]) && usable(rules->shaft_mm[0]) &&
           usable(rules->shaft_mm[1]) && usable(rules->foot_mm) && isfinite(rules->margin);
}

static bool post_usable(const fw_post *post)
{
    return usable(post->tip_mm) && usable(post->shaft_mm) && usable(post->foot_mm) &&
           usable(post->neck_mm) && post->tip_layer >= 0 && isfinite(post->path[0].x) &&
           isfinite(post->path[0].y);
}

fw_status fw_size_post(const fw_size_input *input, fw_post *post, fw_size_outcome *outcome,
                       fw_fault *fault)
{
    if (!rules_usable(input->rules) || !post_usable(post))
        return fw_fault_set(fault, FW_INPUT,
                            "a diameter, length, place or margin is not a usable number, post %d, "
                            "give mm from 0 to 10000",
                            (int)post->id);
    sizing s = {.in = input, .post = *post};
    for (int check = 0; check < FW_POST_CHECKS; check++)
        s.need[check] = pixels_needed(input, (fw_post_check)check);
    if (!post->locked)
        choose(&s, post);
    outcome->missed = missed_checks(&s);
    *post = s.post;
    return FW_OK;
}
