#include "io/model_file.h"
