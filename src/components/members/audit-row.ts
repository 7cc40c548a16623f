/** One line of the audit trail as the API gives it. */
export interface AuditRow {
  id: number;
  at: string;
  who: string;
  action: string;
  target: string;
  detail: Record<string, unknown>;
}
