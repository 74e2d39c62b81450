CREATE TRIGGER `log_amendment_no_delete` BEFORE DELETE ON `log_amendment` FOR EACH ROW SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'Amendments are never deleted';
