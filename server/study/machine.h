// What makes two machines compute the same bits.
#pragma once

#include <string>

namespace drover::study {

// The instruction set extensions that a maths library chooses its code by, and the C library's version:
// "x86_64 avx2+fma glibc 2.36". Where two are equal, a method asked again gives the same bits. Constant in a process;
// the one function of this folder that looks at the machine.
std::string machine_fingerprint();

}  // namespace drover::study
