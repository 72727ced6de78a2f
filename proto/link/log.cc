#include "link/log.h"

#include <grpc/support/log.h>

#include <cstdlib>
#include <memory>
#include <string>
#include <utility>

#include "link/text.h"
#include "spdlog/pattern_formatter.h"
#include "spdlog/sinks/stdout_sinks.h"
#include "spdlog/spdlog.h"

namespace drover::link {
namespace {

// The message with control characters as escapes, so that one event stays one line and no text of others can steer a
// terminal.
class PrintableMessage final : public spdlog::custom_flag_formatter {
 public:
  void format(const spdlog::details::log_msg& message, const std::tm&, spdlog::memory_buf_t& line) override {
    const std::string text = printable({message.payload.data(), message.payload.size()});
    line.append(text.data(), text.data() + text.size());
  }
  std::unique_ptr<custom_flag_formatter> clone() const override { return std::make_unique<PrintableMessage>(); }
};

spdlog::level::level_enum level_of(LogLevel level) {
  switch (level) {
    case LogLevel::kDebug:
      return spdlog::level::debug;
    case LogLevel::kInfo:
      return spdlog::level::info;
    case LogLevel::kWarning:
      return spdlog::level::warn;
    case LogLevel::kError:
      return spdlog::level::err;
  }
  return spdlog::level::info;
}

LogLevel asked_level(LogLevel otherwise) {
  const char* const value = std::getenv("DROVER_LOG");
  const std::string_view word = value == nullptr ? "" : value;
  if (word == "debug") return LogLevel::kDebug;
  if (word == "info") return LogLevel::kInfo;
  if (word == "warning") return LogLevel::kWarning;
  if (word == "error") return LogLevel::kError;
  return otherwise;
}

// gRPC's own words: it reports lost connections as errors, which for us are everyday events.
void from_grpc_library(gpr_log_func_args* said) {
  const bool bad = said->severity == GPR_LOG_SEVERITY_ERROR;
  spdlog::log(bad ? spdlog::level::info : spdlog::level::debug, "grpc: {}", said->message);
}

}  // namespace

void start_log(std::string_view program, LogLevel level) {
  auto formatter = std::make_unique<spdlog::pattern_formatter>(spdlog::pattern_time_type::utc);
  formatter->add_flag<PrintableMessage>('*').set_pattern("%Y-%m-%dT%H:%M:%S.%eZ %l %*");
  std::shared_ptr<spdlog::logger> logger = spdlog::get(std::string(program));
  if (logger == nullptr) logger = spdlog::stderr_logger_mt(std::string(program));
  logger->set_formatter(std::move(formatter));
  logger->set_level(level_of(asked_level(level)));
  logger->flush_on(spdlog::level::debug);
  spdlog::set_default_logger(std::move(logger));
  gpr_set_log_function(from_grpc_library);
}

}  // namespace drover::link
