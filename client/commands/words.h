// Enumerators in words: "set aside" for people, "set_aside" for programs.
#pragma once

#include <string>

#include "drover/v1/attempt.pb.h"
#include "drover/v1/studies.pb.h"
#include "drover/v1/study.pb.h"

namespace drover::commands {

// Unknown values: "unknown". Unspecified ones: "".
std::string word(v1::StudyState state);
std::string word(v1::StopReason reason);
std::string word(v1::RunState state);
std::string word(v1::Ending ending);
std::string word(v1::FailureKind failure);
std::string word(v1::CandidateVerdict verdict);
std::string word(v1::Origin origin);

// With spaces for '_'.
std::string spaced(std::string word);

}  // namespace drover::commands
