// A full disk: a small memory file system is mounted where that is permitted; elsewhere the case is skipped,
// with a message.
#include <cstring>
#include <fstream>

#include <doctest/doctest.h>
#include <sys/mount.h>

#include "daemon/journal/verify.hpp"
#include "scratch.hpp"

using namespace agreed;
using namespace agreed::testing;
namespace fs = std::filesystem;

namespace {

class SmallDisk {
 public:
  explicit SmallDisk(const char* size) {
    const std::string options = std::string("size=") + size;
    mounted_ = ::mount("tmpfs", folder_.path().c_str(), "tmpfs", 0, options.c_str()) == 0;
    if (!mounted_) why_ = std::strerror(errno);
  }
  ~SmallDisk() {
    if (mounted_) ::umount2(folder_.path().c_str(), MNT_DETACH);
  }
  SmallDisk(const SmallDisk&) = delete;
  SmallDisk& operator=(const SmallDisk&) = delete;

  [[nodiscard]] bool mounted() const { return mounted_; }
  [[nodiscard]] const std::string& why() const { return why_; }
  [[nodiscard]] const fs::path& path() const { return folder_.path(); }

 private:
  ScratchFolder folder_;
  bool mounted_ = false;
  std::string why_;
};

void fill_disk(const fs::path& ballast) {
  std::ofstream out(ballast, std::ios::binary);
  const std::string block(4096, 'x');
  while (out.write(block.data(), static_cast<std::streamsize>(block.size())).flush()) continue;
}

void take_rows(Journal& journal, int batch) {
  journal.begin(at(batch));
  const auto file = journal.add_file(file_of("sha-" + std::to_string(batch)));
  for (int i = 0; i < 5000; ++i) journal.add_reading(file, check("wheat-low", batch * 10'000 + i, i));
  journal.finish_file(file, "done", "");
  journal.commit();
}

}  // namespace

TEST_CASE("disk full: the batch is to be retried, nothing is half written, and it works once there is room") {
  const SmallDisk disk("4m");
  if (!disk.mounted()) {
    MESSAGE("skipped: no tmpfs can be mounted here: " << disk.why());
    return;
  }
  Journal journal(disk.path());
  take_rows(journal, 1);
  const auto totals = journal.totals();
  const auto head = journal.head();
  const fs::path ballast = disk.path() / "ballast";
  fill_disk(ballast);
  for (int attempt = 0; attempt < 2; ++attempt) {
    try {
      take_rows(journal, 2);
      FAIL("the disk was not full");
    } catch (const JournalError& error) {
      CHECK(error.retry);
      MESSAGE(std::string(error.what()));
    }
    CHECK(journal.totals() == totals);
    CHECK(journal.head().sha256 == head.sha256);
    CHECK(checks_of(journal, "wheat-low").size() == 5000);
  }
  CHECK_NOTHROW(JournalReader(disk.path()).files({"", "", 10, 0}));
  fs::remove(ballast);
  take_rows(journal, 2);
  CHECK(journal.totals().readings_accepted == 10'000);
  CHECK(verify_journal(disk.path()).faults.empty());
}

TEST_CASE("disk full when the journal is made: refused to be retried, and made once there is room") {
  const SmallDisk disk("2m");
  if (!disk.mounted()) {
    MESSAGE("skipped: no tmpfs can be mounted here: " << disk.why());
    return;
  }
  const fs::path state = disk.path() / "state", ballast = disk.path() / "ballast";
  fs::create_directory(state);
  fill_disk(ballast);
  try {
    const Journal journal(state);
    FAIL("the disk was not full");
  } catch (const JournalError& error) {
    CHECK(error.retry);
  }
  CHECK_FALSE(fs::exists(state / "journal.sqlite"));
  fs::remove(ballast);
  CHECK(Journal(state).head().sequence == 0);
}
