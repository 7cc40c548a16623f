import { describe, expect, it } from 'vitest';
import { cleanFileName } from './receive-upload.ts';

describe('the name of an uploaded file', () => {
  it('keeps neither folders, control characters nor endless tails', () => {
    expect(cleanFileName('C:\\logs\\night 1.csv')).toBe('night 1.csv');
    expect(cleanFileName('../../etc/pass\u0000w\u0007d\u007f')).toBe('passwd');
    expect(cleanFileName('ä'.repeat(300))).toBe('ä'.repeat(200));
  });

  it('is said to be unnamed when nothing is left of it', () => {
    expect(cleanFileName(undefined)).toBe('unnamed file');
    expect(cleanFileName('logs/')).toBe('unnamed file');
  });
});
