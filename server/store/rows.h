// What is read back from the store.
#pragma once

#include <cstdint>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "drover/v1/attempt.pb.h"
#include "drover/v1/code.pb.h"
#include "drover/v1/study.pb.h"
#include "study/events.pb.h"

namespace drover::store {

// A stored event's place in the chain.
struct Appended {
  std::int64_t number = 0;
  std::string hash;  // 32 bytes
};

struct StoredAnswer {
  std::string principal;
  std::string digest;
  std::string response;
};

struct RunRecord {
  std::int64_t study = 0;
  std::string input_digest;
  bool closed = false;  // settled or withdrawn
  v1::AttemptReport settling_report;  // empty unless settled
};

struct AttemptRecord {
  std::string worker;
  std::int64_t end_event = 0;  // 0: open
  std::string end_hash;
  bool has_result = false;  // evaluated, failed or bounded
  bool settled = false;     // it settled its run
};

// A study as its row has it.
struct StudyRow {
  std::int64_t id = 0;
  std::string name, owner;
  v1::StudyState state = v1::STUDY_STATE_UNSPECIFIED;
  v1::StopReason reason = v1::STOP_REASON_UNSPECIFIED;
  std::string sentence;
  std::int64_t revision = 0;
  v1::StudySpec spec;
  std::vector<study::Cell> cells;
  std::int64_t look_ahead = 0;
  std::int64_t candidates = 0, asked = 0, runs = 0;  // issued
  std::int64_t evaluated = 0, failed = 0, withdrawn = 0, learned = 0, lost = 0;
  std::int64_t wall_us = 0;   // of all settled runs
  std::int64_t best = 0;      // candidate; 0: none
  std::int64_t absorbed = 0;
  std::int64_t create_us = 0, end_us = 0;
  std::string swarm_low, swarm_high;  // doubles in [0, 1]
};

struct CandidateRow {
  std::int64_t number = 0;
  std::int64_t ask = 0;  // 0: nobody asked
  v1::Origin origin = v1::ORIGIN_UNSPECIFIED;
  std::string point, values;  // doubles
  int runs = 0, ended = 0;
  std::optional<study::CandidateScore> score;
};

struct AttemptRow {
  std::int64_t fence = 0;
  std::int64_t session = 0;
  std::string worker;
  std::string state;  // as the table has it
  bool released = false;
  bool abnormal = false;
  std::string reason;
  std::map<std::string, std::int32_t> licences;  // held
  std::optional<v1::AttemptReport> report;
};

struct RunRow {
  std::int64_t id = 0, study = 0, number = 0, candidate = 0;
  std::int32_t condition = 0, replicate = 0, code = 0;
  std::string input_digest;
  std::string life;  // open, set_aside, settled, withdrawn
  std::string reason;
  std::int64_t fence = 0;     // of the newest attempt
  std::int64_t settling = 0;  // fence of the attempt that settled it
  std::vector<AttemptRow> attempts;  // those that the question was about, by fence
};

struct OutcomeRow {
  std::int64_t position = 0, ask = 0, candidate = 0;
  std::string point;
  study::CandidateScore score;
};

// What a study's method is made of.
struct SearchRow {
  v1::StudySpec spec;
  std::vector<v1::CodeDefinition> codes;  // by index of the study's codes
  std::vector<study::Cell> cells;
  std::int64_t absorbed_through = 0;
  std::int64_t asked = 0;
  std::string state;  // the method's save()
};

}  // namespace drover::store
