#include "physics/film_memo.h"

#include "fault/quota.h"

#include <pthread.h>
#include <stdlib.h>
#include <string.h>

enum { BUCKETS = 4096, AT_ONCE = 320 << 20 }; /* bytes of films that are being solved */

static const char holder[] = "memo of peel films";

/* All that a result depends on, as bytes: a head, then the arrays in turn. */
typedef struct key_head {
    double px_mm, py_mm, limit, tolerance; /* limit: obstacle, or the cap of a curve */
    fw_film_plane faster, wider;
    int32_t width, height, cell_px, kind;
    uint32_t film, sealed, cavities, spare;
} key_head;

typedef enum entry_state { BEING_SOLVED, SOLVED, FAILED } entry_state;

typedef struct entry {
    struct entry *next; /* in its bucket, or in the list of those kept aside */
    entry_state state;
    size_t bytes; /* charged */
    size_t key_bytes;
    uint64_t hash;
    bool asked; /* since the last trim */
    fw_film_solution solution;
    fw_film_curve curve;
    unsigned char key[];
} entry;

struct fw_film_memo {
    fw_budget *budget;
    fw_quota *at_once;
    pthread_mutex_t lock;  /* held for look-ups and inserts only, never while solving */
    pthread_cond_t solved; /* some entry left BEING_SOLVED */
    entry *bucket[BUCKETS];
    entry *aside; /* not to be found: did not fit, or failed */
};

static fw_status open_lock(fw_film_memo *memo, fw_fault *fault)
{
    if (pthread_mutex_init(&memo->lock, NULL) != 0)
        return fw_fault_memory(fault, holder);
    if (pthread_cond_init(&memo->solved, NULL) != 0) {
        (void)pthread_mutex_destroy(&memo->lock);
        return fw_fault_memory(fault, holder);
    }
    return FW_OK;
}

fw_status fw_film_memo_create(fw_budget *budget, fw_film_memo **out, fw_fault *fault)
{
    fw_film_memo *memo = NULL;
    FW_TRY(fw_allocate((void **)&memo, 1, sizeof *memo, holder, fault));
    memo->budget = budget;
    fw_status status = fw_quota_create(AT_ONCE, &memo->at_once, fault);
    if (status == FW_OK)
        status = open_lock(memo, fault);
    if (status != FW_OK) {
        fw_quota_free(memo->at_once);
        free(memo);
        return status;
    }
    *out = memo;
    return FW_OK;
}

static void free_entry(fw_film_memo *memo, entry *old)
{
    fw_budget_release(memo->budget, old->bytes);
    fw_film_solution_free(&old->solution);
    free(old);
}

static void free_list(fw_film_memo *memo, entry **list)
{
    while (*list != NULL) {
        entry *old = *list;
        *list = old->next;
        free_entry(memo, old);
    }
}

void fw_film_memo_free(fw_film_memo *memo)
{
    if (memo == NULL)
        return;
    for (int b = 0; b < BUCKETS; b++)
        free_list(memo, &memo->bucket[b]);
    free_list(memo, &memo->aside);
    (void)pthread_cond_destroy(&memo->solved);
    (void)pthread_mutex_destroy(&memo->lock);
    fw_quota_free(memo->at_once);
    free(memo);
}

static void drop_stale(fw_film_memo *memo, entry **list)
{
    while (*list != NULL) {
        entry *old = *list;
        if (old->asked) {
            list = &old->next;
            continue;
        }
        *list = old->next;
        free_entry(memo, old);
    }
}

void fw_film_memo_trim(fw_film_memo *memo)
{
    bool pressed = memo->aside != NULL;
    free_list(memo, &memo->aside);
    for (int b = 0; b < BUCKETS; b++) {
        if (pressed)
            drop_stale(memo, &memo->bucket[b]);
        for (entry *kept = memo->bucket[b]; kept != NULL; kept = kept->next)
            kept->asked = false;
    }
}

/* ---- the key ---- */

typedef enum answer_kind { ANSWER_SOLUTION, ANSWER_CURVE, ANSWER_TRACTION } answer_kind;

typedef struct question {
    const fw_film_shape *shape;
    const fw_film_options *options;
    const fw_traction *traction; /* of ANSWER_TRACTION */
    double limit;                /* obstacle, or the cap of a curve */
    answer_kind kind;
} question;

static size_t rows_bytes(const fw_runs *set)
{
    return set->row != NULL ? ((size_t)set->height + 1) * sizeof *set->row : 0;
}

static size_t key_size(const fw_film_shape *shape)
{
    size_t sealed = shape->sealed.count > 0
                        ? rows_bytes(&shape->sealed) +
                              shape->sealed.count * (sizeof(fw_run) + sizeof *shape->cavity)
                        : 0;
    return sizeof(key_head) + rows_bytes(&shape->film) + shape->film.count * sizeof(fw_run) +
           sealed;
}

static unsigned char *append(unsigned char *to, const void *from, size_t bytes)
{
    if (bytes > 0)
        memcpy(to, from, bytes);
    return to + bytes;
}

static void write_key(const question *asked, unsigned char *to)
{
    const fw_film_shape *shape = asked->shape;
    const fw_runs *film = &shape->film, *sealed = &shape->sealed;
    key_head head = {.px_mm = shape->px_mm,
                     .py_mm = shape->py_mm,
                     .limit = asked->limit,
                     .faster = shape->faster,
                     .wider = shape->wider,
                     .tolerance = asked->options->work_tolerance,
                     .width = film->width,
                     .height = film->height,
                     .cell_px = asked->options->cell_px,
                     .kind = (int32_t)asked->kind,
                     .film = film->count,
                     .sealed = sealed->count,
                     .cavities = shape->cavity_count};
    to = append(to, &head, sizeof head);
    to = append(to, film->row, rows_bytes(film));
    to = append(to, film->run, film->count * sizeof *film->run);
    if (sealed->count == 0)
        return;
    to = append(to, sealed->row, rows_bytes(sealed));
    to = append(to, sealed->run, sealed->count * sizeof *sealed->run);
    (void)append(to, shape->cavity, sealed->count * sizeof *shape->cavity);
}

/* FNV-1a, 64 bit (Fowler, Noll, Vo 1991): spreads the keys over the buckets, no more. */
static uint64_t hash_of(const unsigned char *key, size_t bytes)
{
    uint64_t hash = 14695981039346656037u;
    for (size_t i = 0; i < bytes; i++)
        hash = (hash ^ key[i]) * 1099511628211u;
    return hash;
}

/* ---- look-up ---- */

static entry *find(const fw_film_memo *memo, const entry *like)
{
    entry *old = memo->bucket[like->hash % BUCKETS];
    while (old != NULL && !(old->hash == like->hash && old->key_bytes == like->key_bytes &&
                            memcmp(old->key, like->key, like->key_bytes) == 0))
        old = old->next;
    return old;
}

/* Waits for an entry that another thread is solving; true when it came to something. */
static bool wait_for(fw_film_memo *memo, entry *old)
{
    old->asked = true;
    while (old->state == BEING_SOLVED)
        (void)pthread_cond_wait(&memo->solved, &memo->lock);
    return old->state == SOLVED;
}

/* The entry with the key of `new` once it is solved, or `new` itself, entered and to be solved by
 * the caller. What failed is gone from its bucket, so whoever waited for it tries for itself. */
static entry *claim(fw_film_memo *memo, entry *new)
{
    (void)pthread_mutex_lock(&memo->lock);
    entry *found = find(memo, new);
    while (found != NULL && !wait_for(memo, found))
        found = find(memo, new);
    if (found == NULL) {
        entry **bucket = &memo->bucket[new->hash % BUCKETS];
        new->state = BEING_SOLVED;
        new->asked = true;
        new->next = *bucket;
        *bucket = new;
    }
    (void)pthread_mutex_unlock(&memo->lock);
    return found != NULL ? found : new;
}

static void put_aside(fw_film_memo *memo, entry *new)
{
    entry **link = &memo->bucket[new->hash % BUCKETS];
    while (*link != new)
        link = &(*link)->next;
    *link = new->next;
    new->next = memo->aside;
    memo->aside = new;
}

/* The caller has solved its entry, or could not. */
static void settle(fw_film_memo *memo, entry *new, entry_state state)
{
    new->bytes = sizeof *new + new->key_bytes + fw_film_solution_bytes(&new->solution);
    (void)pthread_mutex_lock(&memo->lock);
    if (state == FAILED || !fw_budget_fits(memo->budget, new->bytes))
        put_aside(memo, new);
    fw_budget_charge(memo->budget, new->bytes);
    new->state = state;
    (void)pthread_cond_broadcast(&memo->solved);
    (void)pthread_mutex_unlock(&memo->lock);
}

static fw_status answer(const question *asked, const fw_film_options *options, entry *new,
                        fw_fault *fault)
{
    if (asked->kind == ANSWER_TRACTION)
        return fw_traction_solve(asked->shape, asked->traction, &new->solution, fault);
    if (asked->kind == ANSWER_CURVE)
        return fw_film_curve_build(asked->shape, options, asked->limit, NULL, &new->curve, fault);
    return fw_film_solve(asked->shape, options, &new->solution, fault);
}

static fw_status compute(fw_film_memo *memo, const question *asked, entry *new, fw_fault *fault)
{
    fw_film_options options = *asked->options;
    if (asked->kind == ANSWER_TRACTION) /* solves nothing */
        return answer(asked, &options, new, fault);
    if (options.cell_px == 0)
        options.chosen_px = fw_film_choose_cell(asked->shape);
    const size_t bytes = fw_film_work_bytes(asked->shape, &options);
    fw_quota_take(memo->at_once, bytes);
    const fw_status status = answer(asked, &options, new, fault);
    fw_quota_give(memo->at_once, bytes);
    return status;
}

static fw_status ask(fw_film_memo *memo, const question *asked, entry **out, fw_fault *fault)
{
    entry *new = NULL;
    const size_t bytes = key_size(asked->shape);
    FW_TRY(fw_allocate((void **)&new, 1, sizeof *new + bytes, holder, fault));
    new->key_bytes = bytes;
    write_key(asked, new->key);
    new->hash = hash_of(new->key, bytes);
    *out = claim(memo, new);
    if (*out != new) {
        free(new);
        return FW_OK;
    }
    const fw_status status = compute(memo, asked, new, fault);
    settle(memo, new, status == FW_OK ? SOLVED : FAILED);
    return status;
}

fw_status fw_film_memo_solve(fw_film_memo *memo, const fw_film_shape *shape,
                             const fw_film_options *options, const fw_film_solution **out,
                             fw_fault *fault)
{
    const question asked = {.shape = shape,
                            .options = options,
                            .limit = options->obstacle_mm2,
                            .kind = ANSWER_SOLUTION};
    entry *found = NULL;
    FW_TRY(ask(memo, &asked, &found, fault));
    *out = &found->solution;
    return FW_OK;
}

fw_status fw_film_memo_curve(fw_film_memo *memo, const fw_film_shape *shape,
                             const fw_film_options *options, double cap_MPa,
                             const fw_film_curve **out, fw_fault *fault)
{
    const question asked = {
        .shape = shape, .options = options, .limit = cap_MPa, .kind = ANSWER_CURVE};
    entry *found = NULL;
    FW_TRY(ask(memo, &asked, &found, fault));
    *out = &found->curve;
    return FW_OK;
}

fw_status fw_film_memo_traction(fw_film_memo *memo, const fw_film_shape *shape,
                                const fw_traction *traction, const fw_film_solution **out,
                                fw_fault *fault)
{
    const fw_film_options options = {0};
    const question asked = {
        .shape = shape, .options = &options, .traction = traction, .kind = ANSWER_TRACTION};
    entry *found = NULL;
    FW_TRY(ask(memo, &asked, &found, fault));
    *out = &found->solution;
    return FW_OK;
}
