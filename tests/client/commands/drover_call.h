// Calls `drover` in this process and gives back what it wrote.
#pragma once

#include <cstdio>
#include <cstdlib>
#include <string>
#include <vector>

#include "commands/command.h"
#include "link/clock.h"

namespace drover::commands {

// A stream whose text can be read back.
class Memory {
 public:
  Memory() : stream_(std::tmpfile()) {}
  ~Memory() { std::fclose(stream_); }
  Memory(const Memory&) = delete;
  Memory& operator=(const Memory&) = delete;

  std::FILE* stream() { return stream_; }
  std::string text() {
    std::fflush(stream_);
    std::rewind(stream_);
    std::string text;
    for (int c = std::fgetc(stream_); c != EOF; c = std::fgetc(stream_)) text.push_back(static_cast<char>(c));
    return text;
  }

 private:
  std::FILE* stream_;
};

struct Answer {
  int exit = -1;
  std::string data, messages;
};

inline Answer drover(const std::vector<std::string>& arguments, const std::string& coordinator = "unix:/nowhere/at/all",
                     const std::string& programs = "/nowhere") {
  Memory data, messages;
  const link::RealClock clock;
  Interruption interruption;
  const Surroundings surroundings{.data = data.stream(),
                                  .messages = messages.stream(),
                                  .clock = clock,
                                  .interruption = interruption,
                                  .version = "1.2.3",
                                  .programs = programs,
                                  .coordinator = coordinator,
                                  .user = "somebody"};
  Answer answer;
  answer.exit = run(arguments, surroundings);
  answer.data = data.text();
  answer.messages = messages.text();
  return answer;
}

}  // namespace drover::commands
