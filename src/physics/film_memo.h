/* Solutions and load curves that were asked for before.
 *
 * The key is everything that the result depends on: the runs of film and cavities, which body each
 * sealed run belongs to, the pixel sizes, cell size, obstacle (or cap) and tolerance; it is
 * compared in full on a hit. A result is a pure function of its key, so a memo that is on, off,
 * full or shared by any number of threads never changes a byte of what it hands out.
 *
 * What one thread is solving, others that ask for it wait for.
 *
 * Films that are solved at the same time take 320 MiB at most, or one of them alone: others wait.
 *
 * Ownership: the memo owns all that it hands out. A pointer stays valid until the next
 * fw_film_memo_trim or fw_film_memo_free, also when the budget is full: what does not fit is
 * kept aside, charged past the limit, and freed at the next trim.
 */
#ifndef FW_FILM_MEMO_H
#define FW_FILM_MEMO_H

#include "fault/memory.h"
#include "physics/film.h"
#include "physics/film_curve.h"
#include "physics/traction.h"

typedef struct fw_film_memo fw_film_memo;

/* budget is borrowed, must outlive the memo and be used by nobody else while calls run; limit 0
 * turns the memo off. Free with fw_film_memo_free. */
fw_status fw_film_memo_create(fw_budget *budget, fw_film_memo **out, fw_fault *fault);
void fw_film_memo_free(fw_film_memo *memo);

/* As fw_film_solve and fw_film_curve_build (options->obstacle_mm2 is not read for a curve). May
 * be called by several threads at once; shape and options are not kept. */
fw_status fw_film_memo_solve(fw_film_memo *memo, const fw_film_shape *shape,
                             const fw_film_options *options, const fw_film_solution **out,
                             fw_fault *fault);
fw_status fw_film_memo_curve(fw_film_memo *memo, const fw_film_shape *shape,
                             const fw_film_options *options, double cap_MPa,
                             const fw_film_curve **out, fw_fault *fault);

/* As fw_traction_solve. All calls of one memo must be for the same law: it is no part of the key.
 */
fw_status fw_film_memo_traction(fw_film_memo *memo, const fw_film_shape *shape,
                                const fw_traction *traction, const fw_film_solution **out,
                                fw_fault *fault);

/* Between batches, by one thread while nobody else calls: frees what was kept aside, and, if there
 * was any, also the entries that nobody asked for since the trim before. */
void fw_film_memo_trim(fw_film_memo *memo);

#endif
