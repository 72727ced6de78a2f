#include "supervise.h"

#include <fcntl.h>
#include <signal.h>
#include <sys/prctl.h>
#include <sys/resource.h>
#include <sys/stat.h>
#include <sys/syscall.h>
#include <sys/wait.h>
#include <time.h>
#include <unistd.h>

#include <cerrno>
#include <cstdio>
#include <cstring>
#include <initializer_list>

#include "output_cap.h"
#include "processes.h"
#include "record.h"

extern char** environ;

namespace drover::runner {
namespace {

constexpr long long kLookEveryMs = 100;
constexpr long long kUnkillableAfterMs = 60'000;

enum class Cause { kExited, kLimit, kStopped, kLaunchFailed };

const char* word(Cause cause) {
  switch (cause) {
    case Cause::kExited: return "exited";
    case Cause::kLimit: return "limit";
    case Cause::kStopped: return "stopped";
    case Cause::kLaunchFailed: return "launch-failed";
  }
  return "";
}

// Counts suspend, too: a limit is meant in the time of the world.
long long now_ms() {
  timespec time{};
  clock_gettime(CLOCK_BOOTTIME, &time);
  return time.tv_sec * 1000LL + time.tv_nsec / 1'000'000;
}

long long wall_us() {
  timespec time{};
  clock_gettime(CLOCK_REALTIME, &time);
  return time.tv_sec * 1'000'000LL + time.tv_nsec / 1000;
}

struct Attempt {
  const Order& order;
  int folder = -1;
  int alive = -1;        // lock that the program inherits
  int output[2] = {-1, -1};
  int gate[2] = {-1, -1};
  int trouble[2] = {-1, -1};  // carries the errno of an exec that failed
  pid_t child = 0;
  long long began_ms = 0;

  Cause cause = Cause::kExited;
  int launch_errno = 0;
  bool main_gone = false, killed_by_us = false, unkillable = false;
  int status = 0;  // of the main process
};

bool fail(const char* what) {
  std::fprintf(stderr, "drover-runner: %s: %s\n", what, std::strerror(errno));
  return false;
}

// The rights and ties that the program gets from us.
bool become_supervisor() {
  syscall(SYS_close_range, 3U, ~0U, 0U);
  setsid();  // a leader already has its own
  umask(0077);
  const rlimit no_core{0, 0};
  setrlimit(RLIMIT_CORE, &no_core);
  for (const int signal : {SIGTERM, SIGHUP, SIGINT, SIGPIPE}) ::signal(signal, SIG_IGN);
  sigset_t child;
  sigemptyset(&child);
  sigaddset(&child, SIGCHLD);
  if (sigprocmask(SIG_BLOCK, &child, nullptr) != 0) return fail("signals");
  if (prctl(PR_SET_CHILD_SUBREAPER, 1) != 0) return fail("sub-reaper");
  prctl(PR_SET_NO_NEW_PRIVS, 1, 0, 0, 0);
  return true;
}

// A lock of the open file, which children inherit. Others can ask whether it is held without taking it for a moment
// (F_OFD_GETLK), so that nobody who looks is ever in our way.
bool lock(int file) {
  struct flock whole {};
  whole.l_type = F_WRLCK;
  whole.l_whence = SEEK_SET;
  return fcntl(file, F_OFD_SETLK, &whole) == 0;
}

bool open_all(Attempt& attempt) {
  attempt.folder = open(attempt.order.folder, O_RDONLY | O_DIRECTORY | O_CLOEXEC);
  if (attempt.folder < 0) return fail(attempt.order.folder);
  const int watch = openat(attempt.folder, "watch", O_RDWR | O_CREAT | O_CLOEXEC | O_NOFOLLOW, 0600);
  if (watch < 0 || !lock(watch)) return fail("watch");
  // Whatever became of the one that began it: an attempt begins once.
  if (faccessat(attempt.folder, "begun", F_OK, AT_SYMLINK_NOFOLLOW) == 0) {
    errno = EEXIST;
    return fail("begun");
  }
  attempt.alive = openat(attempt.folder, "alive", O_RDWR | O_CREAT | O_NOFOLLOW, 0600);
  if (attempt.alive < 0 || !lock(attempt.alive)) return fail("alive");
  const char* const names[] = {"stdout", "stderr"};
  for (int i = 0; i < 2; ++i) {
    attempt.output[i] = openat(attempt.folder, names[i], O_WRONLY | O_CREAT | O_APPEND | O_CLOEXEC | O_NOFOLLOW, 0600);
    if (attempt.output[i] < 0) return fail(names[i]);
  }
  if (pipe2(attempt.gate, O_CLOEXEC) != 0 || pipe2(attempt.trouble, O_CLOEXEC) != 0) return fail("pipe");
  return true;
}

// After the fork: waits until its record is on disk, then becomes the program.
[[noreturn]] void be_program(const Attempt& attempt) {
  close(attempt.gate[1]);
  char open_now = 0;
  if (read(attempt.gate[0], &open_now, 1) != 1) _exit(127);
  setpgid(0, 0);
  for (const int signal : {SIGTERM, SIGHUP, SIGINT, SIGPIPE}) ::signal(signal, SIG_DFL);
  sigset_t none;
  sigemptyset(&none);
  sigprocmask(SIG_SETMASK, &none, nullptr);
  // Under pressure for memory the simulation goes first, and not the runner or the daemon.
  const int victim = open("/proc/self/oom_score_adj", O_WRONLY | O_CLOEXEC);
  if (victim >= 0 && write(victim, "1000", 4) < 0) close(victim);
  const int nothing = open("/dev/null", O_RDONLY | O_CLOEXEC);
  const bool ready = nothing >= 0 && dup2(nothing, 0) == 0 && dup2(attempt.output[0], 1) == 1 &&
                     dup2(attempt.output[1], 2) == 2 && chdir(attempt.order.work) == 0;
  if (ready) execve(attempt.order.command[0], attempt.order.command, environ);
  const int error = errno;
  if (write(attempt.trouble[1], &error, sizeof(error)) < 0) _exit(126);
  _exit(127);
}

int write_begun(const Attempt& attempt) {
  char boot[64];
  boot_id(boot, sizeof(boot));
  Record record;
  record.add("boot_id", boot);
  record.add("run", attempt.order.run);
  record.add("fence", attempt.order.fence);
  record.add("runner_pid", getpid());
  record.add("runner_start", static_cast<long long>(start_of(getpid())));
  record.add("child_pid", attempt.child);
  record.add("child_start", static_cast<long long>(start_of(attempt.child)));
  record.add("time_us", wall_us());
  return record.write(attempt.folder, "begun");
}

// No process runs the program before a record names it.
bool start(Attempt& attempt) {
  attempt.child = fork();
  if (attempt.child < 0) return fail("fork");
  if (attempt.child == 0) be_program(attempt);
  close(attempt.gate[0]);
  close(attempt.trouble[1]);
  const int error = write_begun(attempt);
  if (error != 0) {
    close(attempt.gate[1]);  // the child ends without having become anything
    waitpid(attempt.child, nullptr, 0);
    errno = error;
    return fail("begun");
  }
  attempt.began_ms = now_ms();
  // Nobody reads it when somebody killed the child meanwhile: that end is recorded like any other.
  while (write(attempt.gate[1], "!", 1) < 0 && errno == EINTR) {
  }
  close(attempt.gate[1]);
  close(attempt.alive);  // held by the program and all it starts
  int trouble = 0;
  if (read(attempt.trouble[0], &trouble, sizeof(trouble)) == sizeof(trouble)) {
    attempt.cause = Cause::kLaunchFailed;
    attempt.launch_errno = trouble;
  }
  close(attempt.trouble[0]);
  return true;
}

// Takes in all that ended; false when nobody is left.
bool reap(Attempt& attempt) {
  while (true) {
    int status = 0;
    const pid_t pid = waitpid(-1, &status, WNOHANG);
    if (pid == 0) return true;
    if (pid < 0) return errno == EINTR;
    if (pid != attempt.child) continue;
    attempt.main_gone = true;
    attempt.status = status;
  }
}

// How an end is brought about: SIGTERM, the grace, SIGKILL again and again.
class Ending {
 public:
  void begin(long long grace_ms) {
    if (begun_) return;
    begun_ = true;
    kill_at_ = now_ms() + grace_ms;
    signal_descendants(SIGTERM);
    signal_descendants(SIGCONT);  // a stopped process would not hear it
  }
  void go_on(Attempt& attempt) {
    if (!begun_ || now_ms() < kill_at_) return;
    if (!attempt.main_gone) attempt.killed_by_us = true;
    signal_descendants(SIGKILL);
    if (now_ms() > kill_at_ + kUnkillableAfterMs) attempt.unkillable = true;
  }

 private:
  bool begun_ = false;
  long long kill_at_ = 0;
};

void wait_for_end(Attempt& attempt) {
  OutputCap caps[] = {{attempt.output[0], attempt.order.output_cap_bytes},
                      {attempt.output[1], attempt.order.output_cap_bytes}};
  Ending ending;
  long long main_gone_ms = 0;
  sigset_t child;
  sigemptyset(&child);
  sigaddset(&child, SIGCHLD);
  while (reap(attempt) && !attempt.unkillable) {
    if (attempt.main_gone && main_gone_ms == 0) main_gone_ms = now_ms();
    const bool running = !attempt.main_gone && attempt.cause == Cause::kExited;
    const bool stop = faccessat(attempt.folder, "stop", F_OK, 0) == 0;
    if (running && stop) attempt.cause = Cause::kStopped;
    const bool over = now_ms() - attempt.began_ms > attempt.order.time_limit_ms;
    if (running && attempt.cause == Cause::kExited && over) attempt.cause = Cause::kLimit;
    // What the program left behind may come to its end by itself, for as long as the grace.
    const bool lingers = attempt.main_gone && now_ms() - main_gone_ms > attempt.order.grace_ms;
    if (attempt.cause != Cause::kExited || lingers || stop) ending.begin(attempt.order.grace_ms);
    ending.go_on(attempt);
    for (OutputCap& cap : caps) cap.check();
    const timespec look{0, kLookEveryMs * 1'000'000};
    sigtimedwait(&child, nullptr, &look);
  }
  for (OutputCap& cap : caps) cap.check();
}

long long microseconds(const timeval& time) { return time.tv_sec * 1'000'000LL + time.tv_usec; }

void write_ended(const Attempt& attempt) {
  Record record;
  record.add("cause", word(attempt.cause));
  // Neither for a main process that not even SIGKILL ended.
  const bool known = attempt.main_gone && attempt.cause != Cause::kLaunchFailed;
  if (known && WIFEXITED(attempt.status)) record.add("exit_code", WEXITSTATUS(attempt.status));
  if (known && WIFSIGNALED(attempt.status)) record.add("signal", WTERMSIG(attempt.status));
  record.add("launch_errno", attempt.launch_errno);
  record.add("killed_by_us", attempt.killed_by_us ? 1LL : 0LL);
  record.add("unkillable", attempt.unkillable ? 1LL : 0LL);
  rusage used{};
  getrusage(RUSAGE_CHILDREN, &used);
  record.add("wall_us", (now_ms() - attempt.began_ms) * 1000);
  record.add("user_us", microseconds(used.ru_utime));
  record.add("system_us", microseconds(used.ru_stime));
  record.add("peak_memory_bytes", used.ru_maxrss * 1024LL);
  // Only we know how it ended. A full disk may have space again; a folder that is gone is missed by nobody.
  for (int error = record.write(attempt.folder, "ended"); error != 0 && error != ENOENT;
       error = record.write(attempt.folder, "ended")) {
    const timespec second{1, 0};
    nanosleep(&second, nullptr);
  }
}

}  // namespace

int supervise(const Order& order) {
  Attempt attempt{.order = order};
  if (!become_supervisor() || !open_all(attempt) || !start(attempt)) return 1;
  wait_for_end(attempt);
  write_ended(attempt);
  return 0;
}

}  // namespace drover::runner
