CREATE TRIGGER `log_amendment_no_update` BEFORE UPDATE ON `log_amendment` FOR EACH ROW SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'Amendments are never edited';
