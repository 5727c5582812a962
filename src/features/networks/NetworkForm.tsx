import { useMutation, useQueryClient } from '@tanstack/react-query';
import { type FormEvent, useState } from 'react';
import type { Security } from '../../../shared/api/common.ts';
import { type NetworkBody, type NetworkView, networkBody } from '../../../shared/api/networks.ts';
import { NOTE_MAX, SSID_MAX_OCTETS } from '../../../shared/rules/limits.ts';
import { ssidCautions, ssidOctets } from '../../../shared/rules/passphrase.ts';
import { AUDIENCES, type Audience } from '../../../shared/rules/permissions.ts';
import { Button } from '../../components/Button.tsx';
import { Caution } from '../../components/Caution.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { Checkbox, RadioRow, Select, TextArea, TextInput } from '../../components/inputs.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { type ApiError, fieldError, namesFields, sentenceFor } from '../../lib/errors.ts';
import { checkForm } from '../../lib/forms.ts';
import { addNetwork, changeNetwork, vesselKey } from './queries.ts';
import { AUDIENCE_LINE, SECURITY_WORDS } from './words.ts';

interface NetworkFormProps {
  vesselId: string;
  /** Null adds one. */
  network: NetworkView | null;
  onClose: () => void;
  onSaved?: (network: NetworkView) => void;
}

const AUDIENCE_NAMES: Record<Audience, string> = { owner: 'Owner', guest: 'Guest', crew: 'Crew' };

const SECURITY_CHOICES = (['wpa2', 'transition', 'wpa3'] as const).map((value) => ({
  value,
  label: SECURITY_WORDS[value],
}));

/** Adds a network, or corrects one. */
export function NetworkForm({ vesselId, network, onClose, onSaved }: NetworkFormProps) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [ssid, setSsid] = useState(network?.ssid ?? '');
  const [audience, setAudience] = useState<Audience>(network?.audience ?? 'guest');
  const [security, setSecurity] = useState<Security>(network?.security ?? 'wpa2');
  const [hidden, setHidden] = useState(network?.hidden ?? false);
  const [carriesEquipment, setCarriesEquipment] = useState(network?.carriesEquipment ?? false);
  const [note, setNote] = useState(network?.note ?? '');
  const [wrong, setWrong] = useState<ApiError | null>(null);
  const save = useMutation({
    mutationFn: async (body: NetworkBody): Promise<NetworkView & { notice?: string | null }> =>
      network ? changeNetwork(vesselId, network.id, body) : addNetwork(vesselId, body),
    onSuccess: async (saved) => {
      await client.invalidateQueries({ queryKey: vesselKey(vesselId) });
      if (!saved.notice) {
        say(network ? 'Saved.' : 'Added. Type in its passphrase, or let Quayword make one.');
        onClose();
      }
      onSaved?.(saved);
    },
  });
  const title = network ? 'Edit the network' : 'Add a network';
  if (save.data?.notice) {
    return (
      <Dialog open onClose={onClose} title="Saved. Something has to be done aboard">
        <Caution announce>{save.data.notice}</Caution>
        <Button kind="primary" className="self-end" onClick={onClose}>
          I will see to it
        </Button>
      </Dialog>
    );
  }
  const submit = (event: FormEvent) => {
    event.preventDefault();
    const checked = checkForm(networkBody, {
      ssid,
      audience,
      security,
      hidden,
      carriesEquipment,
      note: note.trim() === '' ? null : note,
    });
    setWrong(checked.ok ? null : checked.error);
    if (checked.ok && !save.isPending) save.mutate(checked.value);
  };
  const error = wrong ?? save.error;
  const renamed = network !== null && ssid !== network.ssid;
  const hides = network !== null && hidden && !network.hidden;
  return (
    <Dialog open onClose={onClose} title={title} keepOpen>
      <form onSubmit={submit} noValidate className="flex flex-col gap-4">
        <TextInput
          label="Name as phones show it"
          hint={`${ssidOctets(ssid)} of ${SSID_MAX_OCTETS} octets. Capitals and spaces count.`}
          value={ssid}
          autoComplete="off"
          autoCapitalize="none"
          spellCheck={false}
          onChange={(event) => setSsid(event.target.value)}
          error={fieldError(error, 'ssid')}
        />
        {ssid === ''
          ? null
          : ssidCautions(ssid).map((caution) => (
              <p key={caution} className="text-sm text-soft">
                {caution}
              </p>
            ))}
        {renamed ? (
          <Caution announce>
            With another name every device has to join again, even though the passphrase stays: the name is
            part of the key. Cards printed with the old name are void, and the access points need the new name
            at once.
          </Caution>
        ) : hides ? (
          <Caution announce>
            Cards printed until now do not say that the network is hidden, so they are void.
          </Caution>
        ) : null}
        <RadioRow<Audience>
          label="Who it is for"
          name="audience"
          value={audience}
          options={AUDIENCES.map((value) => ({
            value,
            label: AUDIENCE_NAMES[value],
            hint: AUDIENCE_LINE[value],
          }))}
          onChange={setAudience}
          error={fieldError(error, 'audience')}
        />
        <Select
          label="Security"
          hint="With WPA2, somebody who recorded one phone joining can try passphrases elsewhere at full speed. WPA3 only keeps that off, but older phones cannot join."
          value={security}
          onChange={(event) => setSecurity(event.target.value as Security)}
          options={SECURITY_CHOICES}
          error={fieldError(error, 'security')}
        />
        <Checkbox
          label="Hidden: it does not show itself in lists"
          checked={hidden}
          onChange={(event) => setHidden(event.target.checked)}
        />
        <Checkbox
          label="Carries bridge, navigation, alarm or monitoring equipment"
          hint="Then its passphrase is never changed while a crossing is on, and only with the ETO. The maker's instructions and class rules come first."
          checked={carriesEquipment}
          onChange={(event) => setCarriesEquipment(event.target.checked)}
        />
        <TextArea
          label="Note"
          hint="May be left empty. Never the passphrase."
          value={note}
          maxLength={NOTE_MAX}
          onChange={(event) => setNote(event.target.value)}
          error={fieldError(error, 'note')}
        />
        {error && !namesFields(error) ? (
          <p role="alert" className="text-sm font-medium text-magenta">
            {sentenceFor(error)}
          </p>
        ) : null}
        <div className="flex flex-wrap justify-end gap-3">
          <Button onClick={onClose}>Cancel</Button>
          <Button type="submit" kind="primary" busy={save.isPending && 'Saving…'}>
            {network ? 'Save' : 'Add the network'}
          </Button>
        </div>
      </form>
    </Dialog>
  );
}
