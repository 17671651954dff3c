#include "engine/capacitance.h"
