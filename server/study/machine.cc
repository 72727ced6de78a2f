#include "study/machine.h"

#include <gnu/libc-version.h>
#include <sys/utsname.h>

namespace drover::study {
namespace {

std::string architecture() {
  utsname name{};
  return uname(&name) == 0 ? std::string(name.machine) : std::string("unknown");
}

// glibc's mathematical functions come in variants for exactly these, and a fused multiply-add rounds once, not twice.
std::string extensions() {
#if defined(__x86_64__)
  __builtin_cpu_init();
  std::string text = "sse2";
  if (__builtin_cpu_supports("avx2")) text = "avx2";
  if (__builtin_cpu_supports("avx512f")) text = "avx512f";
  if (__builtin_cpu_supports("fma")) text += "+fma";
  return text;
#else
  return "base";
#endif
}

}  // namespace

std::string machine_fingerprint() { return architecture() + " " + extensions() + " glibc " + gnu_get_libc_version(); }

}  // namespace drover::study
