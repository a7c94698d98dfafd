#include "daemon/intake/answer_queue.hpp"

#include <chrono>

namespace agreed {
namespace {
constexpr auto kLookForStop = std::chrono::milliseconds(50);
}

bool AnswerQueue::submit(const std::shared_ptr<TakenFile>& file, FilePiece&& piece,
                         const std::stop_token& stop) {
  const std::size_t rows = piece.rows.size() + piece.bad.size();
  while (!waiting_.empty() && (waiting_.size() >= limits_.files || rows_ + rows > limits_.rows))
    take_answer(stop);
  while (piece.last && file->unanswered > 0) take_answer(stop);
  if (file->failed) return false;
  if (stop.stop_requested()) throw Stopping{};
  Waiting waiting{file, {}, rows, piece.last};
  piece.round = round_;
  pulse_.rest();
  try {
    waiting.answer = sink_.submit(std::move(piece));
  } catch (...) {  // the answer tells, in its turn
    std::promise<PieceAnswer> refused;
    refused.set_exception(std::current_exception());
    waiting.answer = refused.get_future();
  }
  pulse_.step();
  ++file->unanswered;
  rows_ += rows;
  waiting_.push_back(std::move(waiting));
  return true;
}

void AnswerQueue::drain(const std::stop_token& stop) {
  while (!waiting_.empty()) take_answer(stop);
  ++round_;
}

void AnswerQueue::take_answer(const std::stop_token& stop) {
  pulse_.rest();
  while (waiting_.front().answer.wait_for(kLookForStop) != std::future_status::ready)
    if (stop.stop_requested()) throw Stopping{};
  pulse_.step();
  Waiting waiting = std::move(waiting_.front());
  waiting_.pop_front();
  rows_ -= waiting.rows;
  --waiting.file->unanswered;
  PieceAnswer answer;
  std::string error;
  try {
    answer = waiting.answer.get();
  } catch (const std::exception& failure) {
    if (stop.stop_requested()) throw Stopping{};  // refused because of that: no failed commit
    error = failure.what();
    waiting.file->failed = true;
  }
  answered(waiting, answer, error);
}

void AnswerQueue::answered(const Waiting& waiting, const PieceAnswer& answer, const std::string& error) {
  TakenFile& file = *waiting.file;
  if (file.dropped || file.unanswered > 0) return;
  if (file.failed || waiting.last) settle_(file, answer, error);
}

}  // namespace agreed
