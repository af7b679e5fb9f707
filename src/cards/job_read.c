/* Contents: paths; what cannot stand together; the three readers. */
#include "cards/job_read.h"

#include "cards/yaml_read.h"
#include "fault/memory.h"
#include "physics/cure.h"
#include "physics/separation.h"

#include <errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

/* --- paths --- */

void fw_job_sources_free(fw_job_sources *sources)
{
    for (int i = 0; i < FW_SOURCE_COUNT; i++)
        free(sources->path[i]);
    *sources = (fw_job_sources){0};
}

/* Joins the folder of `beside` and name (name alone where it is absolute) into *out. */
static fw_status resolve(const char *beside, const char *name, char **out, fw_fault *fault)
{
    const char *slash = strrchr(beside, '/');
    size_t folder = slash == NULL || name[0] == '/' ? 0 : (size_t)(slash - beside) + 1;
    size_t length = strlen(name);
    void *joined;
    FW_TRY(fw_allocate(&joined, folder + length + 1, 1, "job", fault));
    memcpy(joined, beside, folder);
    memcpy((char *)joined + folder, name, length);
    *out = joined;
    return FW_OK;
}

/* Where the card lies that a key of the job names; a card that is not there is the job's fault. */
static fw_status find_card(const fw_yaml_marks *marks, const char *key, const char *name,
                           char **out, fw_fault *fault)
{
    struct stat what;
    if (name == NULL)
        return FW_OK;
    FW_TRY(resolve(marks->file, name, out, fault));
    if (stat(*out, &what) != 0)
        return fw_yaml_refuse(marks, key, fault, "%s cannot be opened (%s); correct the path", *out,
                              strerror(errno));
    return FW_OK;
}

static fw_status find_all(const fw_yaml_marks *marks, const fw_job_file *file,
                          fw_job_sources *sources, fw_fault *fault)
{
    FW_TRY(resolve("", marks->file, &sources->path[FW_SOURCE_JOB], fault));
    FW_TRY(find_card(marks, "resin", file->resin, &sources->path[FW_SOURCE_RESIN], fault));
    return find_card(marks, "machine", file->machine, &sources->path[FW_SOURCE_MACHINE], fault);
}

/* --- what cannot stand together --- */

static fw_status check_ascending(const fw_yaml_marks *marks, const char *key, const double pair[2],
                                 fw_fault *fault)
{
    if (pair[0] <= pair[1])
        return FW_OK;
    return fw_yaml_refuse(marks, key, fault, "%g is above %g; give the smaller number first",
                          pair[0], pair[1]);
}

/* A post widens from tip to shaft to foot, so the limits must leave room for that. */
static fw_status check_rules(const fw_yaml_marks *marks, const fw_post_rules *rules,
                             fw_fault *fault)
{
    FW_TRY(check_ascending(marks, "posts.tip_mm", rules->tip_mm, fault));
    FW_TRY(check_ascending(marks, "posts.shaft_mm", rules->shaft_mm, fault));
    if (rules->tip_mm[1] > rules->shaft_mm[1])
        return fw_yaml_refuse(marks, "posts.tip_mm", fault,
                              "the largest tip (%g) is wider than the largest shaft (%g); lower it",
                              rules->tip_mm[1], rules->shaft_mm[1]);
    if (rules->foot_mm < rules->shaft_mm[0])
        return fw_yaml_refuse(marks, "posts.foot_mm", fault,
                              "the foot (%g) is narrower than the smallest shaft (%g); widen it",
                              rules->foot_mm, rules->shaft_mm[0]);
    return FW_OK;
}

/* A pattern names a file, not a path, and has one run of '#'. */
static fw_status check_names(const fw_yaml_marks *marks, const char *names, fw_fault *fault)
{
    const char *run = strchr(names, '#');
    if (names[0] == '\0')
        return FW_OK;
    if (run == NULL || strchr(run + strspn(run, "#"), '#') != NULL || strchr(names, '/') != NULL)
        return fw_yaml_refuse(marks, "stack.names", fault,
                              "'%s' needs one run of # where the number stands, and no folder",
                              names);
    return FW_OK;
}

static fw_status check_grey(const fw_yaml_marks *marks, const fw_machine *machine, fw_fault *fault)
{
    if (!fw_yaml_given(marks, "grey") || fw_cure_is_response(&machine->grey))
        return FW_OK;
    return fw_yaml_refuse(marks, "grey", fault,
                          "is no response: begin with [0, 0], end with [1, 1], greys rising and "
                          "doses never falling");
}

static fw_status check_gap(const fw_yaml_marks *marks, fw_machine *machine, fw_fault *fault)
{
    const char *key = "separation.gap_range_um";
    double *range = machine->gap_range_um;
    if (!fw_yaml_given(marks, key)) {
        range[0] = range[1] = machine->gap_um;
        return FW_OK;
    }
    FW_TRY(check_ascending(marks, key, range, fault));
    if (machine->gap_um < range[0] || machine->gap_um > range[1])
        return fw_yaml_refuse(marks, key, fault, "[%g, %g] does not contain gap_um, %g; widen it",
                              range[0], range[1], machine->gap_um);
    return FW_OK;
}

/* A line needs two points. */
static fw_status check_hinge(const fw_yaml_marks *marks, const fw_machine *machine, fw_fault *fault)
{
    const char *key = "separation.hinge_mm";
    const double(*at)[2] = machine->hinge_mm.at;
    if (machine->hinge_mm.count != 2 || (at[0][0] == at[1][0] && at[0][1] == at[1][1]))
        return fw_yaml_refuse(marks, key, fault, "is no line; give two points apart");
    if (fw_separation_lever(machine, machine->plate_mm[0] / 2, machine->plate_mm[1] / 2) == 0)
        return fw_yaml_refuse(marks, key, fault,
                              "runs through the plate's centre, where speed_mm_s is; move it");
    return FW_OK;
}

static fw_status check_force_table(const fw_yaml_marks *marks, const fw_machine *machine,
                                   fw_fault *fault)
{
    const fw_points *table = &machine->table_mm2_N;
    double before[2] = {0, 0};
    for (int i = 0; i < table->count; i++) {
        if (!(table->at[i][0] > before[0]) || table->at[i][1] < before[1])
            return fw_yaml_refuse(marks, "separation.table_mm2_N", fault,
                                  "pair %d does not grow on the one before it; sort by area from "
                                  "above 0, forces never falling",
                                  i + 1);
        before[0] = table->at[i][0];
        before[1] = table->at[i][1];
    }
    if (table->count > 0)
        return FW_OK;
    return fw_yaml_refuse(marks, "separation.table_mm2_N", fault,
                          "is empty; give one pair at least");
}

/* Which keys of separation a mode needs and takes. */
typedef struct mode_key {
    const char *key;
    unsigned takes, needs; /* bits by fw_mode */
} mode_key;

enum {
    PULL = 1 << FW_MODE_PULL,
    TILT = 1 << FW_MODE_TILT,
    FILM = 1 << FW_MODE_FILM,
    MEASURED = 1 << FW_MODE_MEASURED,
    SLIDE = 1 << FW_MODE_SLIDE
};

static const mode_key mode_keys[] = {
    {"separation.speed_mm_s", PULL | TILT | SLIDE, PULL | TILT | SLIDE},
    {"separation.gap_um", PULL | TILT | SLIDE, PULL | TILT | SLIDE},
    {"separation.gap_range_um", PULL | TILT | SLIDE, 0},
    {"separation.cap_kPa", PULL | TILT | FILM, 0},
    {"separation.hinge_mm", TILT, TILT},
    {"separation.slide_deg", SLIDE, 0},
    {"separation.area_kPa", FILM, FILM},
    {"separation.rim_N_mm", FILM, FILM},
    {"separation.front_mm", FILM, 0},
    {"separation.table_mm2_N", MEASURED, MEASURED},
};

static fw_status check_mode(const fw_yaml_marks *marks, const fw_machine *machine, fw_fault *fault)
{
    static const char *const name[] = {"pull", "tilt", "film", "measured", "slide"};
    for (size_t i = 0; i < sizeof mode_keys / sizeof *mode_keys; i++) {
        const mode_key *row = &mode_keys[i];
        const bool given = fw_yaml_given(marks, row->key);
        const unsigned mode = 1u << machine->mode;
        if (given && (row->takes & mode) == 0)
            return fw_yaml_refuse(marks, row->key, fault,
                                  "means nothing in mode: %s; leave it out or change the mode",
                                  name[machine->mode]);
        if (!given && (row->needs & mode) != 0)
            return fw_yaml_refuse(marks, "separation.mode", fault, "%s needs %s; add it",
                                  name[machine->mode], strchr(row->key, '.') + 1);
    }
    if (machine->mode == FW_MODE_TILT)
        return check_hinge(marks, machine, fault);
    return machine->mode == FW_MODE_MEASURED ? check_force_table(marks, machine, fault) : FW_OK;
}

static fw_status curable(const fw_job *job, const char *where, fw_fault *fault)
{
    const fw_resin *resin = &job->resin;
    double through = resin->exposure_mJ_cm2 * exp(-job->layer_um / resin->penetration_um);
    double needed = resin->joint_ratio * resin->critical_mJ_cm2;
    if (!job->has_resin || through >= needed)
        return FW_OK;
    return fw_fault_set(fault, FW_INPUT,
                        "%s: cure.exposure_mJ_cm2: this resin cannot cure this layer thickness: "
                        "%.4g of the %.4g mJ/cm2 needed come through %g um; expose more or slice "
                        "thinner",
                        where, through, needed, job->layer_um);
}

fw_status fw_job_curable(const fw_job *job, const char *path, fw_fault *fault)
{
    return curable(job, path, fault);
}

/* --- the three readers --- */

/* Strength at the card's exposure, from one value or from several. */
static fw_status set_tensile(const fw_yaml_marks *marks, fw_resin *resin, fw_fault *fault)
{
    const char *one = "green.tensile_MPa", *several = "green.tensile_mJ_cm2_MPa";
    const fw_points *points = &resin->tensile_mJ_cm2_MPa;
    if (fw_yaml_given(marks, one) == fw_yaml_given(marks, several))
        return fw_yaml_refuse(marks, "green", fault,
                              "give tensile_MPa or tensile_mJ_cm2_MPa, one of the two");
    if (!fw_yaml_given(marks, several))
        return FW_OK;
    double before[2] = {resin->critical_mJ_cm2, 0};
    for (int i = 0; i < points->count; i++) {
        if (!(points->at[i][0] > before[0]) || !(points->at[i][1] > before[1]))
            return fw_yaml_refuse(marks, several, fault,
                                  "pair %d does not grow on the one before it, the first from "
                                  "critical_mJ_cm2 and 0 MPa on",
                                  i + 1);
        before[0] = points->at[i][0];
        before[1] = points->at[i][1];
    }
    if (points->count == 0)
        return fw_yaml_refuse(marks, several, fault, "is empty; give one pair at least");
    resin->tensile_MPa = fw_cure_green(points, resin->critical_mJ_cm2, resin->exposure_mJ_cm2);
    if (resin->tensile_MPa > 0)
        return FW_OK;
    return fw_yaml_refuse(marks, several, fault, "gives no strength at cure.exposure_mJ_cm2");
}

static fw_status read_resin(const char *path, fw_resin *out, fw_yaml_marks *marks, fw_fault *fault)
{
    *out = (fw_resin){0};
    fw_status status = fw_yaml_read(path, &fw_resin_table, out, marks, fault);
    if (status == FW_OK)
        status = set_tensile(marks, out, fault);
    if (status != FW_OK)
        *out = (fw_resin){0};
    return status;
}

fw_status fw_resin_read(const char *path, fw_resin *out, fw_fault *fault)
{
    fw_yaml_marks marks;
    return read_resin(path, out, &marks, fault);
}

fw_status fw_machine_read(const char *path, fw_machine *out, fw_fault *fault)
{
    fw_yaml_marks marks;
    *out = (fw_machine){0};
    fw_status status = fw_yaml_read(path, &fw_machine_table, out, &marks, fault);
    if (status == FW_OK)
        status = check_grey(&marks, out, fault);
    if (status == FW_OK)
        status = check_mode(&marks, out, fault);
    if (status == FW_OK)
        status = check_gap(&marks, out, fault);
    if (status != FW_OK)
        *out = (fw_machine){0};
    return status;
}

/* Reads the resin card and holds it against the job's layer thickness. */
static fw_status add_resin(fw_job *job, const char *path, fw_fault *fault)
{
    fw_yaml_marks marks;
    FW_TRY(read_resin(path, &job->resin, &marks, fault));
    job->has_resin = true;
    char where[FW_FAULT_TEXT];
    snprintf(where, sizeof where, "%s:%d", path, fw_yaml_line(&marks, "cure.exposure_mJ_cm2"));
    return curable(job, where, fault);
}

static fw_status read_all(const char *path, fw_job_file *file, fw_job_sources *sources,
                          fw_fault *fault)
{
    fw_yaml_marks marks;
    fw_job *job = &file->job;
    FW_TRY(fw_yaml_read(path, &fw_job_table, file, &marks, fault));
    FW_TRY(check_names(&marks, job->names, fault));
    if (job->has_rules)
        FW_TRY(check_rules(&marks, &job->rules, fault));
    FW_TRY(find_all(&marks, file, sources, fault));
    if (file->resin != NULL)
        FW_TRY(add_resin(job, sources->path[FW_SOURCE_RESIN], fault));
    if (file->machine != NULL) {
        FW_TRY(fw_machine_read(sources->path[FW_SOURCE_MACHINE], &job->machine, fault));
        job->has_machine = true;
    }
    return FW_OK;
}

fw_status fw_job_read(const char *path, fw_job *out, fw_job_sources *sources, fw_fault *fault)
{
    fw_job_file file = {0};
    fw_job_sources own = {0};
    fw_status status = read_all(path, &file, &own, fault);
    free(file.resin);
    free(file.machine);
    *out = status == FW_OK ? file.job : (fw_job){0};
    if (status != FW_OK || sources == NULL)
        fw_job_sources_free(&own);
    if (sources != NULL)
        *sources = own;
    return status;
}
