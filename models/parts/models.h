/* The parts that falsework-part can make. */
#ifndef PART_MODELS_H
#define PART_MODELS_H

#include "solids.h"

extern const part_model PART_MODELS[]; /* [PART_MODEL_COUNT] */
extern const int PART_MODEL_COUNT;

#endif
