#include "engine/impedance.h"
