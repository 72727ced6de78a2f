// Who may run what, and who runs what: open runs, their attempts, sessions, licences.
//
// The book is a fold over events: `apply` takes each committed event and nothing else changes what is booked. Beside
// that it holds what no event says and no disk keeps: when each session was last heard from. Its questions (pick,
// lapsed, impatient...) change nothing; the caller turns their answers into events.
//
// `now` is a steady clock's reading. Not thread-safe. Settled runs take no memory, except for attempts at them that
// have not ended yet and so still hold a slot and licences.
//
// Leases and what they mean: Gray and Cheriton (1989), SOSP. Fences: Kleppmann (2016).
#pragma once

#include <cstdint>
#include <deque>
#include <map>
#include <optional>
#include <set>
#include <string>
#include <vector>

#include "absl/status/status.h"
#include "absl/time/time.h"
#include "dispatch/times.h"
#include "study/events.pb.h"

namespace drover::dispatch {

struct Attempt {
  enum class State { kGranted, kBegun, kParked, kStopping };
  std::int64_t fence = 0;
  std::int64_t session = 0;
  std::string worker;
  State state = State::kGranted;
  bool released = false;  // patience is over: the run may be granted again
  absl::Duration since = absl::ZeroDuration();  // of the last change of state
  std::map<std::string, std::int32_t> licences;  // held
};

struct Run {
  std::int64_t id = 0;
  std::int64_t study = 0;
  std::int64_t number = 0;
  std::int64_t candidate = 0;
  std::int32_t condition = 0;
  std::int32_t replicate = 0;
  std::int32_t code = 0;  // index in the study's codes
  std::string input_digest;
  std::int64_t fence = 0;  // of the newest attempt; 0: none yet
  bool set_aside = false;
  bool closed = false;  // settled or withdrawn; here only while attempts at it are open
  int losses = 0;       // attempts lost by the site since this coordinator started
  absl::Duration not_before = -absl::InfiniteDuration();  // back-off after a loss
  std::set<std::string> abnormal_on;  // workers on which its own processes were killed from outside
  std::map<std::int64_t, Attempt> attempts;  // open ones, by fence

  // Nobody has it who may still be heard from.
  bool waiting() const;
};

// What dispatch has to know of a study.
struct Study {
  std::int64_t id = 0;
  std::int32_t priority = 0;
  bool granting = false;  // ACTIVE or FINISHING
  std::vector<std::string> code_digests;  // by index of the study's codes
  std::vector<std::map<std::string, std::int32_t>> licences;  // of one run, by index of the code
  std::vector<absl::Duration> time_limits;  // with the code's grace, by index of the code
  std::vector<std::string> tags;
};

struct Session {
  std::int64_t id = 0;
  std::string token;
  std::string worker, host, version;
  std::int64_t incarnation = 0;
  std::int32_t slots = 0;
  std::set<std::string> code_digests;
  std::set<std::string> tags;
  std::string fleet_job;
  absl::Duration heard = absl::ZeroDuration();
  bool lapsed = false;
  std::optional<absl::Duration> ends;  // the machine's time is over then
};

// An attempt.
struct Key {
  std::int64_t run = 0;
  std::int64_t fence = 0;
  auto operator<=>(const Key&) const = default;
};

class Book {
 public:
  explicit Book(const Times& times);

  // --- what is booked ---
  void add_study(Study study);          // or replaces it
  void set_granting(std::int64_t study, bool granting);
  void drop_study(std::int64_t study);  // it has come to its end
  void set_licences(std::map<std::string, std::int32_t> counts);
  void add_run(Run run);                // waiting, or with the attempts it has (at a start)
  void add_session(Session session);
  // Applies an event about runs, attempts and sessions; others are ignored. `worker` of an abnormal loss is the
  // session's. INTERNAL when the event does not fit what is booked: a bug, after which the book must be loaded anew.
  absl::Status apply(const study::Event& event, absl::Duration now);

  // --- the clock ---
  // To be called with every turn of the caller's loop. After a jump larger than `late` nothing lapses for the
  // lateness and a lease; after start() not before the grace is over.
  void start(absl::Duration now);
  void turn(absl::Duration now);
  void heard(std::int64_t session, absl::Duration now);
  void set_time_left(std::int64_t session, std::optional<absl::Duration> left, absl::Duration now);

  // --- questions ---
  // The run that the session should be given next: larger priority, then the study with fewer attempts out, then the
  // older run. None when nothing waits that it may run.
  std::optional<std::int64_t> pick(std::int64_t session, absl::Duration now) const;
  // Slots of the session that no open attempt occupies.
  std::int32_t free_slots(std::int64_t session) const;
  // Sessions whose lease lapsed and has not been marked so.
  std::vector<std::int64_t> lapsed(absl::Duration now) const;
  void mark_lapsed(std::int64_t session);
  // Parked attempts for which patience is over.
  std::vector<Key> impatient(absl::Duration now) const;
  // Parked attempts that hold licences although their own time limit and grace have passed since they were granted.
  std::vector<Key> overdue_licences(absl::Duration now) const;
  // Has it been killed from outside on three workers?
  bool poisonous(const Run& run) const;

  const Run* run(std::int64_t id) const;
  const Session* session(std::int64_t id) const;
  const Session* session_by_token(const std::string& token) const;
  const Session* session_of_worker(const std::string& worker) const;  // its newest
  std::vector<Key> attempts_of_worker(const std::string& worker) const;
  std::vector<std::int64_t> open_runs(std::int64_t study) const;      // neither settled nor withdrawn, in order
  std::int64_t open_count(std::int64_t study) const;
  std::int64_t set_aside_count(std::int64_t study) const;
  // Live (not lapsed) sessions' slots that could run the study, and how many of its attempts are out.
  std::int32_t slots_for(std::int64_t study) const;
  std::int32_t busy_workers(std::int64_t study) const;
  const std::map<std::int64_t, Session>& sessions() const { return sessions_; }
  const std::map<std::string, std::int32_t>& licence_counts() const { return counts_; }
  std::int32_t held(const std::string& pool) const;
  const Times& times() const { return times_; }
  // Memory of who was heard when, carried over when the book is loaded anew after a failed commit.
  void keep_times_of(const Book& before);

 private:
  struct Queue {
    Study study;
    std::set<std::int64_t> open;     // runs
    std::set<std::int64_t> waiting;  // those of them that may be granted
    int out = 0;                     // open attempts
    std::deque<absl::Duration> recent;  // how long its last runs took, since this coordinator started
  };
  void remember_time(std::int64_t run, const v1::AttemptReport& report);
  // The larger of Times::patience and what nine in ten of the study's last runs took.
  absl::Duration patience(const Queue& queue) const;
  absl::Status granted(const study::Granted& granted, absl::Duration now);
  absl::Status heard_again(const study::Heard& heard, absl::Duration now);
  absl::Status change(std::int64_t run, std::int64_t fence, Attempt::State state, absl::Duration now);
  absl::Status end_attempt(std::int64_t run, std::int64_t fence);
  absl::Status close(std::int64_t run);
  absl::Status lost(const study::AttemptLost& lost, absl::Duration now);
  void back_off(Run& run, absl::Duration now) const;
  void release_licences(Attempt& attempt);
  void hold_licences(const Attempt& attempt);
  void requeue(Run& run);
  void forget_if_done(std::int64_t run);
  void open_session(const study::SessionOpened& opened, absl::Duration now);
  bool may_run(const Session& session, const Study& study, const Run& run, absl::Duration now) const;
  bool licences_free(const std::map<std::string, std::int32_t>& wanted) const;
  Run* find(std::int64_t id);
  Attempt* find(std::int64_t run, std::int64_t fence);

  Times times_;
  std::map<std::int64_t, Queue> studies_;
  std::map<std::int64_t, Run> runs_;
  std::map<std::int64_t, Session> sessions_;  // the newest of each worker
  std::map<std::string, std::int64_t> by_token_;
  std::map<std::string, std::int64_t> by_worker_;
  std::map<std::string, std::set<Key>> attempts_by_worker_;
  std::map<std::string, std::int32_t> counts_;
  std::map<std::string, std::int32_t> held_;
  absl::Duration last_turn_ = absl::ZeroDuration();
  absl::Duration no_lapse_before_ = absl::ZeroDuration();
};

}  // namespace drover::dispatch
