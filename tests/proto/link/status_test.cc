#include "link/status.h"

#include <gtest/gtest.h>

#include <string>

#include "absl/strings/cord.h"

namespace drover::link {
namespace {

absl::Status with_detail(absl::Status status, const v1::ErrorDetail& detail) {
  status.SetPayload({kErrorDetailUrl.data(), kErrorDetailUrl.size()}, absl::Cord(detail.SerializeAsString()));
  return status;
}

TEST(Status, PassesAllSeventeenCodesBothWaysWithTheirDetails) {
  v1::ErrorDetail detail;
  detail.set_reason("NO_SUCH_SESSION");
  v1::Problem* const problem = detail.add_problems();
  problem->set_field("variable[2].low");
  problem->set_text("is above its high");
  for (int code = 0; code <= 16; ++code) {
    const absl::Status sent = with_detail(absl::Status(static_cast<absl::StatusCode>(code), "the words"), detail);
    const grpc::Status carried = to_grpc(sent);
    EXPECT_EQ(static_cast<int>(carried.error_code()), code);
    const absl::Status back = from_grpc(carried);
    EXPECT_EQ(static_cast<int>(back.code()), code);
    if (code == 0) continue;
    EXPECT_EQ(back.message(), "the words") << code;
    EXPECT_EQ(error_reason(back), "NO_SUCH_SESSION") << code;
    ASSERT_TRUE(error_detail(back).has_value()) << code;
    EXPECT_EQ(error_detail(back)->problems(0).field(), "variable[2].low") << code;
  }
}

TEST(Status, HasNoReasonWhereThereAreNoDetails) {
  const absl::Status back = from_grpc(grpc::Status(grpc::StatusCode::NOT_FOUND, "no study"));
  EXPECT_FALSE(error_detail(back).has_value());
  EXPECT_EQ(error_reason(back), "");
  EXPECT_EQ(error_reason(absl::OkStatus()), "");
}

TEST(Status, IsUnknownForACodeThatDoesNotExist) {
  const absl::Status back = from_grpc(grpc::Status(static_cast<grpc::StatusCode>(20), "new"));
  EXPECT_EQ(back.code(), absl::StatusCode::kUnknown);
  EXPECT_EQ(back.message(), "new");
}

TEST(Status, CleansTheMessage) {
  EXPECT_EQ(to_grpc(absl::InternalError("caf\xE9")).error_message(), "caf\xEF\xBF\xBD");
  EXPECT_EQ(from_grpc(grpc::Status(grpc::StatusCode::INTERNAL, "\xFF")).message(), "\xEF\xBF\xBD");
}

TEST(Status, SurvivesDetailsThatAreNone) {
  const absl::Status back = from_grpc(grpc::Status(grpc::StatusCode::NOT_FOUND, "x", "\xFF\xFF\xFF"));
  EXPECT_FALSE(error_detail(back).has_value());
}

TEST(Status, LeavesOutProblemsThatWouldNotTravel) {
  v1::ErrorDetail detail;
  detail.set_reason("INVALID_STUDY");
  for (int i = 0; i < 1000; ++i) detail.add_problems()->set_text(std::string(100, 'x'));
  const grpc::Status carried = to_grpc(with_detail(absl::InvalidArgumentError(std::string(100'000, 'y')), detail));
  EXPECT_LE(carried.error_message().size() * 3 + carried.error_details().size() * 4 / 3, 60u << 10);
  const std::optional<v1::ErrorDetail> back = error_detail(from_grpc(carried));
  ASSERT_TRUE(back.has_value());
  EXPECT_EQ(back->reason(), "INVALID_STUDY");
  EXPECT_GT(back->problems_size(), 100);
  EXPECT_EQ(back->metadata().at("problems_left_out"), std::to_string(1000 - back->problems_size()));
}

}  // namespace
}  // namespace drover::link
