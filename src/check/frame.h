/* The machine's give (pulloff.h) on a whole layer: one spring, the loads of all clusters together.
 */
#ifndef FW_CHECK_FRAME_H
#define FW_CHECK_FRAME_H

#include "check/peel.h"

/* Brings a layer that was solved for a rigid machine (every cluster at setup->q) to the q at which
 * the layer comes off: cluster forces, peel->force_N and peel->q. Films at their cap are solved
 * again there, so the sum agrees with the peak to the 1 % of a load curve. Does nothing where the
 * card gives no stiffness. */
fw_status fw_frame_relax(const fw_setup *setup, fw_film_memo *memo, fw_peel *peel, fw_fault *fault);

/* The peak force at one end of the gap range. */
fw_status fw_frame_range(const fw_setup *setup, fw_film_memo *memo, const fw_peel *peel, int end,
                         double *force_N, fw_fault *fault);

/* Sets peel->push_N: the layer on its way back to the window, at the card's speed down to its gap.
 * Films squeezed have no cap. Before fw_frame_relax. */
fw_status fw_frame_approach(const fw_setup *setup, fw_film_memo *memo, fw_peel *peel,
                            fw_fault *fault);

#endif
