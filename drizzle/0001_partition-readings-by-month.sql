-- Months before the first one named here share p_min; the worker splits p_max ahead of time.
ALTER TABLE `reading` PARTITION BY RANGE COLUMNS(`at`) (
  PARTITION p_min VALUES LESS THAN ('2025-09-01'),
  PARTITION p_max VALUES LESS THAN (MAXVALUE)
);
