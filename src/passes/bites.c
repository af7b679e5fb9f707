#include "passes/bites.h"

#include "physics/cure.h"

#include <math.h>
#include <stdlib.h>

static const double deepest_mm = 0.5;

/* What one tip has met so far, from its tip layer on. */
typedef struct bite {
    int64_t disc_px;    /* pixels of the tip's disc */
    int64_t most_px;    /* of these, most covered in one layer so far */
    int32_t most_layer; /* counted from the tip layer */
    bool done;
} bite;

typedef struct search {
    const fw_job *job;
    const fw_screen *screen;
    fw_posts *posts;
    bite *found;            /* [posts->count] */
    int32_t least, deepest; /* layers */
    int32_t intended_least;
} search;

/* Looks at one post in a layer `depth` layers into the part. */
static fw_status look(search *now, size_t index, int32_t depth, const fw_runs *part, fw_runs *disc,
                      fw_runs *scratch, fw_fault *fault)
{
    const fw_post *post = &now->posts->item[index];
    bite *found = &now->found[index];
    const fw_disc tip = {post->path[0].x, post->path[0].y, post->tip_mm};
    FW_TRY(fw_disc_footprint(now->screen, &tip, disc, fault));
    found->disc_px = fw_runs_pixels(disc);
    FW_TRY(fw_runs_intersect(disc, part, scratch, fault));
    const int64_t pixels = fw_runs_pixels(scratch);
    if (pixels == 0) { /* through the part: what was found before it must do */
        found->done = true;
        return FW_OK;
    }
    if (pixels > found->most_px || (depth <= now->least && pixels == found->most_px)) {
        found->most_px = pixels;
        found->most_layer = depth;
    }
    found->done = depth >= now->least && found->most_px == found->disc_px;
    return FW_OK;
}

static fw_status look_at_layer(search *now, int32_t layer, const fw_greys *greys, fw_fault *fault)
{
    fw_runs part = {0}, disc = {0}, scratch = {0};
    fw_status status = fw_greys_at_least(greys, now->intended_least, &part, fault);
    for (size_t i = 0; i < now->posts->count && status == FW_OK; i++) {
        const int32_t depth = layer - now->posts->item[i].tip_layer;
        if (depth >= 0 && depth <= now->deepest && !now->found[i].done)
            status = look(now, i, depth, &part, &disc, &scratch, fault);
    }
    fw_runs_free(&part);
    fw_runs_free(&disc);
    fw_runs_free(&scratch);
    return status;
}

static bool anyone_near(const search *now, int32_t layer)
{
    for (size_t i = 0; i < now->posts->count; i++) {
        const int32_t depth = layer - now->posts->item[i].tip_layer;
        if (depth >= 0 && depth <= now->deepest)
            return true;
    }
    return false;
}

static fw_status walk(const fw_pass *pass, const fw_raw *raw, int32_t lift, search *now,
                      fw_fault *fault)
{
    fw_greys greys = {0};
    fw_status status = FW_OK;
    for (int32_t n = lift; n < raw->layers + lift && status == FW_OK; n++) {
        if (!anyone_near(now, n))
            continue;
        status = fw_store_get(raw->store, n - lift, &greys, fault);
        if (status == FW_OK)
            status = look_at_layer(now, n, &greys, fault);
        if (status == FW_OK)
            status = fw_pass_tick(pass, "measuring bites", n, raw->layers + lift, fault);
    }
    fw_greys_free(&greys);
    return status;
}

fw_status fw_bites_find(const fw_pass *pass, const fw_raw *raw, int32_t lift, const fw_job *job,
                        const fw_screen *screen, fw_posts *posts, fw_fault *fault)
{
    const double t = job->layer_um / 1000;
    search now = {.job = job,
                  .screen = screen,
                  .posts = posts,
                  .least = (int32_t)ceil(job->rules.bite_mm / t - 1e-9),
                  .deepest = (int32_t)ceil(deepest_mm / t - 1e-9),
                  .intended_least = fw_cure_intended_least(job->intent_level, raw->full)};
    FW_TRY(fw_allocate((void **)&now.found, posts->count, sizeof *now.found, "bites", fault));
    const fw_status status = walk(pass, raw, lift, &now, fault);
    for (size_t i = 0; i < posts->count && status == FW_OK; i++) {
        if (!posts->item[i].locked)
            posts->item[i].bite_layers = now.found[i].most_layer;
    }
    free(now.found);
    return status;
}
