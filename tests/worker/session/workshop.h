// A worker daemon in the test's own process, with real runners and small shell programs as simulations.
#pragma once

#include <functional>
#include <memory>
#include <string>
#include <thread>

#include "code/catalogue.h"
#include "link/clock.h"
#include "process/files.h"
#include "session/daemon.h"
#include "worker/session/fake_coordinator.h"

namespace drover::session {

bool eventually(const std::function<bool()>& holds, absl::Duration most = absl::Seconds(30));

// An own temporary folder, and at its end the proof that nothing runs in it any more.
class Workshop {
 public:
  Workshop();
  ~Workshop();

  // Adds a code whose program is this shell script, run in the run's folder, where `case.in` sets x. Its output y is
  // the first number after "Y=" in case.out. `gate` in the script stands for the path of the gate.
  code::Definition& add_code(const std::string& name, const std::string& script);
  // y = 2 x at once; waits for the gate first; ends with code 3.
  void add_usual_codes();
  void open_gate();  // lets the waiting ones end
  // How often a script of ours was begun (every script appends a line).
  int begun() const;

  v1::Grant grant(std::int64_t run, const std::string& code, double x = 1, std::int64_t fence = 1) const;

  Options options() const;
  // Opens a daemon and runs it in a thread.
  void start() { start(options()); }
  void start(const Options& options) { start(options, files); }
  void start(const Options& options, process::Files& disk);
  absl::Status stop();  // as SIGTERM does; what run() returned
  void drop();          // as a crash: the daemon is gone, what it started goes on

  std::string attempt_file(const Key& key, const std::string& name) const;
  bool has_report(const Key& key) const { return files.exists(attempt_file(key, "report")); }
  bool running(const Key& key) const;  // its simulation has begun, by its runner's record, and lives
  int processes() const;               // whose working folder lies in ours

  const std::string base;
  code::Catalogue catalogue;
  FakeCoordinator coordinator;
  process::RealFiles files;
  link::RealClock clock;

 private:
  std::unique_ptr<Daemon> daemon_;
  std::thread thread_;
  absl::Status ended_;
};

}  // namespace drover::session
