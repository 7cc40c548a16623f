import { describe, expect, it } from 'vitest';
import { role } from '../../../shared/contracts/permission.ts';
import { auditAction, auditDetail, auditTarget } from './audit-words.ts';
import { roleChange } from './role-words.ts';
import { tokenState } from './token-state.ts';

describe('what a change of role does', () => {
  it('takes everything from whoever leaves, and gives nothing', () => {
    for (const each of role.options) {
      const { loses, gains } = roleChange(each, null);
      expect(loses).toContain('read comparisons');
      expect(gains).toEqual([]);
    }
  });
  it('names what an operator gains and loses as analyst, contester and manager', () => {
    expect(roleChange('operator', 'analyst')).toEqual({
      loses: [],
      gains: [
        'correct where calls are',
        'compare under other rules than the standing ones',
        'save, change and put away trials',
        'freeze findings and record decisions',
        'share findings with guests',
      ],
    });
    expect(roleChange('operator', 'contester').loses).toContain('log switching and mend the switch log');
    expect(roleChange('operator', 'manager').gains).toContain('invite, change and remove members');
    expect(roleChange('operator', 'operator')).toEqual({ loses: [], gains: [] });
  });
});

describe('the audit trail in words', () => {
  const names = (noun: string, id: string) =>
    noun === 'antenna' && id === '3' ? 'North-east wire' : undefined;
  const entry = (action: string, target: string, detail: Record<string, unknown> = {}) => ({
    id: 1,
    at: '2026-11-30T18:05:00Z',
    who: 'Ann',
    action,
    target,
    detail,
  });
  it('shows an action that has no words yet by its name', () => {
    expect([auditAction('antenna.add'), auditAction('moon.bounce')]).toEqual([
      'added an antenna',
      'moon.bounce',
    ]);
  });
  it('names the target by the particulars, then by what the station knows, then by its id', () => {
    expect(auditTarget(entry('trial.save', '7', { name: 'Autumn' }), names)).toBe('Autumn');
    expect(auditTarget(entry('antenna.update', '3', { notes: 'x' }), names)).toBe('North-east wire');
    expect(auditTarget(entry('antenna.update', '4'), names)).toBe('4');
    expect(auditTarget(entry('station.update', '1'), names)).toBe('');
  });
  it('writes the particulars as a line', () => {
    expect(auditDetail({ from: 'operator', to: 'analyst' })).toBe('from operator, to analyst');
    expect(auditDetail({ inServiceTo: null, scopes: ['dwell:read', 'spot:read'] })).toBe(
      'in service to nothing, scopes dwell:read and spot:read',
    );
  });
});

describe('the state of an API token', () => {
  const nowMs = Date.parse('2026-11-30T18:00:00Z');
  it('is good until it ends or is revoked', () => {
    const token = { expiresAt: '2026-12-01T18:00:00Z', revokedAt: null };
    expect(tokenState(token, nowMs)).toEqual({ isGood: true, words: 'good, ends in 1\u2009d' });
    expect(tokenState({ ...token, expiresAt: '2026-11-30T18:00:00Z' }, nowMs)).toEqual({
      isGood: false,
      words: 'ended now',
    });
    expect(tokenState({ ...token, revokedAt: '2026-11-30T17:00:00Z' }, nowMs)).toEqual({
      isGood: false,
      words: 'revoked 1\u2009h ago',
    });
  });
});
