import type { IConnackPacket } from 'mqtt-packet'

/** What a broker's answer to CONNECT means (MQTT 3.1.1 §3.2.2.3, MQTT 5 §3.2.2.2); code 0 lets us in. */
export const refusedConnect = (packet: IConnackPacket): { code: number; text: string } => {
  const code = packet.reasonCode ?? packet.returnCode ?? 0
  const texts: Record<number, string> = {
    1: 'it does not speak this version of MQTT',
    2: 'it refuses our client id',
    3: 'it says that it is not available',
    4: 'it refuses user or password: check the _USER and _PASSWORD_FILE variables',
    5: 'it does not let this user in: check its access list',
    132: 'it does not speak this version of MQTT',
    133: 'it refuses our client id',
    134: 'it refuses user or password: check the _USER and _PASSWORD_FILE variables',
    135: 'it does not let this user in: check its access list',
    136: 'it says that it is not available',
    137: 'it says that it is busy',
    151: 'it says that a quota is used up',
    159: 'it limits how often we may connect',
  }
  return { code, text: texts[code] ?? `it refuses our connection (code ${code})` }
}

export const isVersionRefusal = (code: number) => code === 1 || code === 0x84
