// LedgerLock: one campaign at a time on a ledger. A lock on LEDGER.lock held by this process until it ends in whichever
// way, so that a lock left by a killed one does no harm. Across machines where the file system passes locks on.
#pragma once

#include <string>

namespace leat {

class LedgerLock {
 public:
  explicit LedgerLock(const std::string& ledger);  // LedgerTrouble: locked, or machine if it cannot be made
  ~LedgerLock();                                   // and takes the file away
  LedgerLock(const LedgerLock&) = delete;
  LedgerLock& operator=(const LedgerLock&) = delete;

 private:
  std::string path_;
  int file_ = -1;
};

}  // namespace leat
