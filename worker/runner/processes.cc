#include "processes.h"

#include <dirent.h>
#include <fcntl.h>
#include <signal.h>
#include <unistd.h>

#include <cstdio>
#include <cstdlib>
#include <cstring>

namespace drover::runner {
namespace {

struct Process {
  pid_t pid, parent;
  bool ours;
};

// One read, of what is far shorter than the buffer.
bool read_file(const char* path, char* text, unsigned long size) {
  const int file = open(path, O_RDONLY | O_CLOEXEC);
  if (file < 0) return false;
  const ssize_t length = read(file, text, size - 1);
  close(file);
  if (length < 0) return false;
  text[length] = '\0';
  return true;
}

// Fields after the name in parentheses, which may itself hold blanks and parentheses: state is field 3.
bool stat_fields(pid_t pid, char& state, pid_t& parent, unsigned long long& start) {
  char path[64], text[1024];
  std::snprintf(path, sizeof(path), "/proc/%d/stat", static_cast<int>(pid));
  if (!read_file(path, text, sizeof(text))) return false;
  const char* const after = std::strrchr(text, ')');
  int parent_number = 0;
  if (after == nullptr) return false;
  const int read =
      std::sscanf(after + 1, " %c %d %*d %*d %*d %*d %*u %*u %*u %*u %*u %*u %*u %*d %*d %*d %*d %*d %*d %llu", &state,
                  &parent_number, &start);
  parent = parent_number;
  return read == 3;
}

constexpr int kMostProcesses = 65536;

// Grows with the machine's processes and is kept for the next look.
Process* table = nullptr;
int room = 0;

int read_table() {
  int count = 0;
  DIR* const proc = opendir("/proc");
  if (proc == nullptr) return 0;
  while (const dirent* const entry = readdir(proc)) {
    const pid_t pid = std::atoi(entry->d_name);
    char state = '?';
    pid_t parent = 0;
    unsigned long long start = 0;
    if (pid <= 0 || !stat_fields(pid, state, parent, start) || state == 'Z' || state == 'X') continue;
    if (count == room && room < kMostProcesses) {
      const int larger = room == 0 ? 256 : room * 2;
      auto* const grown =
          static_cast<Process*>(std::realloc(table, sizeof(Process) * static_cast<unsigned long>(larger)));
      if (grown == nullptr) break;
      table = grown;
      room = larger;
    }
    if (count == room) break;
    table[count++] = {pid, parent, false};
  }
  closedir(proc);
  return count;
}

bool is_ours(pid_t pid, int count) {
  if (pid == getpid()) return true;
  for (int i = 0; i < count; ++i) {
    if (table[i].pid == pid) return table[i].ours;
  }
  return false;
}

}  // namespace

unsigned long long start_of(pid_t pid) {
  char state = '?';
  pid_t parent = 0;
  unsigned long long start = 0;
  return stat_fields(pid, state, parent, start) ? start : 0;
}

void boot_id(char* text, unsigned long size) {
  text[0] = '\0';
  if (!read_file("/proc/sys/kernel/random/boot_id", text, size)) return;
  text[std::strcspn(text, "\n")] = '\0';
}

int signal_descendants(int signal) {
  const int count = read_table();
  // Marks spread from parents to children until none is new; pids wrap around, so one pass in their order is not
  // enough.
  for (bool changed = true; changed;) {
    changed = false;
    for (int i = 0; i < count; ++i) {
      if (table[i].ours || !is_ours(table[i].parent, count)) continue;
      table[i].ours = changed = true;
    }
  }
  int alive = 0;
  for (int i = 0; i < count; ++i) {
    if (table[i].ours && kill(table[i].pid, signal) == 0) ++alive;
  }
  return alive;
}

}  // namespace drover::runner
