/* Judges any stack anew, from its files alone. */
#ifndef FALSEWORK_RECHECK_H
#define FALSEWORK_RECHECK_H

#include "falsework/posts.h"
#include "falsework/survey.h"

#ifdef __cplusplus
extern "C" {
#endif

/* posts: which pixels are posts, and their margins; NULL: everything solid is taken as part.
 * raw: the stack before posts, to find alterations of the part; NULL: not looked for. Both cards
 * are needed. FALSEWORK_OK also when the gate refuses: see the verdict. options may be NULL. The
 * caller closes *report. */
FALSEWORK_API falsework_status falsework_recheck(const falsework_stack *stack,
                                                 const falsework_job *job,
                                                 const falsework_posts *posts,
                                                 const falsework_stack *raw,
                                                 const falsework_options *options,
                                                 falsework_report **report, falsework_fault *fault);

#ifdef __cplusplus
}
#endif
#endif
