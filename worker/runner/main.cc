// drover-runner: owns the processes of one attempt, and outlives the daemon that started it.
#include "order.h"
#include "supervise.h"

int main(int argc, char** argv) {
  drover::runner::Order order;
  if (!drover::runner::parse_order(argc, argv, order)) return 2;
  return drover::runner::supervise(order);
}
