/** What a chip says of a receiver. `antenna` null: on no antenna; undefined: not known. */
export interface ChipReceiver {
  id: number;
  label: string;
  callSign: string;
  antenna: { name: string; marker: string } | null | undefined;
}
