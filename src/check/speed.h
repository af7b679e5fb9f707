/* How fast each layer may be parted from the window. */
#ifndef FW_CHECK_SPEED_H
#define FW_CHECK_SPEED_H

#include "check/conclude.h"

/* Fills speed_cap_mm_s of every layer row from its load and smallest margin: the fastest drive
 * speed at which all margins of the layer reach the gate's and the drive and the gate bear the
 * load. NAN where nothing limits it or nothing is known (no cards, a measured law, a layer at its
 * cap that would have to be slower: there the load hardly depends on the speed).
 *
 * Below the cap loads go with q, and so, on a rigid machine, with the speed; through a frame the
 * motion is solved (pulloff.h). A film that is at its cap, or gets there when faster, carries less
 * than the straight line through the origin says (its load is concave in q): the speed is then on
 * the safe side. Shares between anchors are taken to stay as they are. No more than FW_SPEED_MOST.
 */
fw_status fw_speed_caps(const fw_conclusion *conclusion, fw_report *out, fw_fault *fault);

/* mm/s, the fastest that a card may name. */
#define FW_SPEED_MOST 100.0

#endif
