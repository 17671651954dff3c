#include "engine/cross_section.h"

namespace engine {}
