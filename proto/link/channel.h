// gRPC settings of both sides, from one table (reliability: pings, windows, limits).
#pragma once

#include <memory>

#include <grpcpp/grpcpp.h>

#include "absl/time/time.h"
#include "link/address.h"

namespace drover::link {

inline constexpr int kLargestMessage = 1 << 20;  // bytes, both ways
inline constexpr absl::Duration kPingEvery = absl::Seconds(20);
inline constexpr absl::Duration kPingAnswer = absl::Seconds(10);
inline constexpr absl::Duration kLongestPoll = absl::Seconds(40);  // deadline of a long poll
inline constexpr absl::Duration kCallLimit = absl::Seconds(30);    // deadline of every other call

// A channel to a coordinator; connects when first used. Unix sockets and loopback TCP only need no credentials; any
// other address is refused with UNIMPLEMENTED until certificates exist.
absl::StatusOr<std::shared_ptr<grpc::Channel>> dial(const Address& address);

// The server's half: pings, message size, no retry. Adds no port.
void set_server_options(grpc::ServerBuilder& builder);

// A deadline for a call's context, from now.
void set_deadline(grpc::ClientContext& context, absl::Duration limit);

}  // namespace drover::link
