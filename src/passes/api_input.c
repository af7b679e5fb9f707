/* Public handles for what is read: stacks, jobs, posts. */
#include "cards/begin.h"
#include "cards/posts_read.h"
#include "passes/api.h"
#include "passes/facts.h"

#include <stdlib.h>

static const char holder[] = "handle";

falsework_status falsework_job_open(const char *path, falsework_job **job, falsework_fault *fault)
{
    fw_fault inner = {0};
    falsework_job *opened = NULL;
    *job = NULL;
    fw_status status = fw_allocate((void **)&opened, 1, sizeof *opened, holder, &inner);
    if (status == FW_OK)
        status = fw_job_read(path, &opened->job, &opened->sources, &inner);
    if (status == FW_OK)
        *job = opened;
    else
        free(opened);
    return fw_api_status(status, &inner, fault);
}

void falsework_job_close(falsework_job *job)
{
    if (job == NULL)
        return;
    fw_job_sources_free(&job->sources);
    free(job);
}

falsework_status falsework_job_use_resin(falsework_job *job, const char *path,
                                         falsework_fault *fault)
{
    fw_fault inner = {0};
    fw_job changed = job->job;
    fw_status status = fw_resin_read(path, &changed.resin, &inner);
    changed.has_resin = true;
    if (status == FW_OK)
        status = fw_job_curable(&changed, path, &inner);
    if (status == FW_OK)
        job->job = changed;
    return fw_api_status(status, &inner, fault);
}

falsework_status falsework_job_use_machine(falsework_job *job, const char *path,
                                           falsework_fault *fault)
{
    fw_fault inner = {0};
    fw_machine machine;
    const fw_status status = fw_machine_read(path, &machine, &inner);
    if (status == FW_OK) {
        job->job.machine = machine;
        job->job.has_machine = true;
    }
    return fw_api_status(status, &inner, fault);
}

falsework_status falsework_stack_open(const char *path, const falsework_job *job,
                                      falsework_stack **stack, falsework_fault *fault)
{
    fw_fault inner = {0};
    falsework_stack *opened = NULL;
    const bool named = job != NULL && job->job.names[0] != '\0';
    *stack = NULL;
    fw_status status = fw_allocate((void **)&opened, 1, sizeof *opened, holder, &inner);
    if (status == FW_OK)
        status = fw_stack_open(path, named ? job->job.names : NULL, &opened->stack, &inner);
    if (status == FW_OK)
        *stack = opened;
    else
        free(opened);
    return fw_api_status(status, &inner, fault);
}

void falsework_stack_close(falsework_stack *stack)
{
    if (stack == NULL)
        return;
    fw_stack_close(stack->stack);
    free(stack);
}

int32_t falsework_stack_layers(const falsework_stack *stack)
{
    return fw_stack_count(stack->stack);
}

falsework_status falsework_stack_begin(const falsework_stack *stack, FILE *file,
                                       falsework_fault *fault)
{
    fw_fault inner = {0};
    fw_begin_facts facts;
    fw_status status = fw_facts_find(stack->stack, &facts, &inner);
    if (status == FW_OK)
        status = fw_begin_write(file, &facts, &inner);
    return fw_api_status(status, &inner, fault);
}

falsework_status falsework_posts_open(const char *path, falsework_posts **posts,
                                      falsework_fault *fault)
{
    fw_fault inner = {0};
    falsework_posts *opened = NULL;
    *posts = NULL;
    fw_status status = fw_allocate((void **)&opened, 1, sizeof *opened, holder, &inner);
    if (status == FW_OK)
        status =
            fw_posts_read(path, &opened->posts, opened->raw_sha256, &opened->lift_layers, &inner);
    if (status == FW_OK)
        *posts = opened;
    else
        free(opened);
    return fw_api_status(status, &inner, fault);
}

size_t falsework_posts_count(const falsework_posts *posts)
{
    return posts->posts.count;
}

falsework_post falsework_posts_get(const falsework_posts *posts, size_t index)
{
    const fw_post *post = &posts->posts.item[index];
    return (falsework_post){.id = post->id,
                            .routed = post->routed,
                            .tip_layer = post->tip_layer,
                            .x_mm = post->path[0].x,
                            .y_mm = post->path[0].y,
                            .tip_mm = post->tip_mm,
                            .shaft_mm = post->shaft_mm,
                            .foot_mm = post->foot_mm};
}

void falsework_posts_close(falsework_posts *posts)
{
    if (posts == NULL)
        return;
    free(posts->posts.item);
    free(posts);
}
