// The processes of this machine, as far as a runner has to know them.
#pragma once

#include <sys/types.h>

namespace drover::runner {

// When the process started, in the kernel's ticks; 0: there is no such process.
unsigned long long start_of(pid_t pid);

// The machine's boot id, or an empty text.
void boot_id(char* text, unsigned long size);

// Sends the signal to every descendant of this process: all of its children's children end up here, since it is their
// sub-reaper. How many were alive.
int signal_descendants(int signal);

}  // namespace drover::runner
