// One loop over several threads.
#pragma once

#include <functional>

namespace netlists {

/// Calls work(i) once for each i from 0 to count - 1, on `threads` threads (1 at least); each call must
/// write to places of its own, so that the result does not depend on their number. What a call throws is
/// thrown again when all threads have ended; of several, that of the lowest i.
void in_parallel(int count, int threads, const std::function<void(int)>& work);

/// As many as the machine has.
int machine_threads();

}  // namespace netlists
