#include "engine/attribution.h"
