#include "netlists/findings.h"
