#include "engine/network.h"

namespace engine {}
