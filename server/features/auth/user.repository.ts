import type { EntityManager } from 'typeorm';
import { User } from '../../database/entities/user.ts';

export const userRepository = {
  byEmail: (manager: EntityManager, email: string) => manager.findOneBy(User, { email }),
  byId: (manager: EntityManager, id: string) => manager.findOneBy(User, { id }),
  async add(
    manager: EntityManager,
    user: { email: string; name: string; passwordHash: string },
  ): Promise<User> {
    return manager.save(manager.create(User, user));
  },
  async setPassword(manager: EntityManager, id: string, passwordHash: string): Promise<void> {
    await manager.update(User, { id }, { passwordHash, passwordChangedAt: new Date() });
  },
  async update(
    manager: EntityManager,
    id: string,
    change: Partial<Pick<User, 'name' | 'lengthUnit' | 'theme'>>,
  ) {
    if (Object.keys(change).length > 0) await manager.update(User, { id }, change);
  },
};
