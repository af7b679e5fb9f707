/* More tips where one alone cannot carry its load at the largest size. */
#ifndef FW_PASSES_EXTRAS_H
#define FW_PASSES_EXTRAS_H

#include "passes/feed.h"
#include "passes/sizes.h"
#include "passes/tips.h"

/* For each overloaded post (sizing->missed), adds tips round it in its own layer, as many as its
 * load asks for. tipping->posts is sizing->posts. *added counts them; 0 where there is no place for
 * any. */
fw_status fw_extras_add(const fw_raw *raw, int32_t lift, const fw_sizing *sizing,
                        fw_tipping *tipping, size_t *added, fw_fault *fault);

#endif
